import type { Beam } from '../scene/types.ts';
import type { DataEntry } from './study-types.ts';

/** `15 x 12 arcsec at 30 deg`. */
export function formatBeam({ majorArcsec, minorArcsec, angle }: Beam): string {
  const short = (value: number): string => `${Number(value.toPrecision(4))}`;
  return `${short(majorArcsec)} x ${short(minorArcsec)} arcsec at ${short((angle * 180) / Math.PI)} deg`;
}

/** What was assumed or done about the signs of a map: a wrong sign picks the wrong geometry. */
export function signText(file: string, { quantity, convention, angleOf }: DataEntry): string[] {
  if (quantity === 'I') return [];
  const said: string[] = [];
  if (convention === undefined) said.push(`${file}: signs assumed as IAU (angles from north through east); state \`convention: IAU\` or \`U-reversed\`.`);
  if (convention === 'U-reversed' && quantity === 'U') said.push(`${file}: U changed in sign, as \`convention: U-reversed\` asks.`);
  if (angleOf === undefined) said.push(`${file}: angles assumed to be those of the electric vector; state \`angleOf: E\` or \`B\`.`);
  if (angleOf === 'B') said.push(`${file}: ${quantity} changed in sign, because \`angleOf: B\` means angles 90 deg from the electric vector's.`);
  return said;
}

export function zeroLevelText(file: string, { zeroLevel }: DataEntry): string[] {
  return zeroLevel ? [`${file}: zero level ${zeroLevel.text} subtracted.`] : [`${file}: zero level assumed right (\`zeroLevel\`).`];
}

export function noiseText(file: string, { noise, noiseMap }: DataEntry): string[] {
  if (noise) return [`${file}: noise ${noise.text} assumed the same in all pixels and channels.`];
  return noiseMap === undefined ? [] : [`${file}: noise from ${noiseMap}; pixels where it is blank or not above 0 are masked.`];
}

export function maskText(file: string, blank: number, count: number): string[] {
  return blank === 0 ? [] : [`${file}: ${blank} blank values of ${count} left out.`];
}
