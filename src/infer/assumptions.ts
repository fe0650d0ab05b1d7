import type { Beam } from '../scene/types.ts';
import type { ReadMap } from './map-facts.ts';
import type { DataEntry } from './study-types.ts';

/** `15 x 12 arcsec at 30 deg`. */
export function formatBeam({ majorArcsec, minorArcsec, angle }: Beam): string {
  const short = (value: number): string => `${Number(value.toPrecision(4))}`;
  return `${short(majorArcsec)} x ${short(minorArcsec)} arcsec at ${short((angle * 180) / Math.PI)} deg`;
}

/** What was assumed or done about the signs of a map: a wrong sign picks the wrong geometry. */
export function signText({ file, convention: header }: ReadMap, { quantity, convention, angleOf }: DataEntry): string[] {
  if (quantity === 'I') return [];
  const said: string[] = [];
  if (convention === undefined && header !== undefined) said.push(`${file}: signs are ${header} by its header.`);
  if (convention !== undefined && header !== undefined && header !== convention) {
    said.push(`${file}: its header says that signs are ${header}; \`convention: ${convention}\` was followed instead.`);
  }
  if (convention === undefined && header === undefined) {
    said.push(`${file}: signs assumed as IAU (angles from north through east); state \`convention: IAU\` or \`U-reversed\`.`);
  }
  if ((convention ?? header) === 'U-reversed' && quantity === 'U') said.push(`${file}: U changed in sign, because it is reversed.`);
  if (angleOf === undefined) {
    said.push(`${file}: angles assumed to be those of the electric vector; state \`angleOf: E\` or \`B\`.`);
  } else if (angleOf === 'B') {
    said.push(`${file}: ${quantity} changed in sign, because \`angleOf: B\` means angles 90 deg from the electric vector's.`);
  }
  return said;
}

/** What was assumed or done about the zero level of a map. */
export function zeroLevelText(file: string, { zeroLevel }: DataEntry): string[] {
  return zeroLevel ? [`${file}: zero level ${zeroLevel.text} subtracted.`] : [`${file}: zero level assumed right (\`zeroLevel\`).`];
}

/** What was assumed about the noise of a map. */
export function noiseText(file: string, { noise, noiseMap }: DataEntry): string[] {
  if (noise) return [`${file}: noise ${noise.text} assumed the same in all pixels and channels.`];
  if (noiseMap !== undefined) return [`${file}: noise from ${noiseMap}; pixels where it is blank or not above 0 are masked.`];
  return [`${file}: noise from the header, assumed the same in all pixels.`];
}

/** How many values of a map are blank. */
export function maskText(file: string, blank: number, count: number): string[] {
  return blank === 0 ? [] : [`${file}: ${blank} blank values of ${count} left out.`];
}
