import type { Beam } from '../scene/types.ts';
import type { BrightnessUnit, Channel } from '../sky/types.ts';
import type { CelestialWcs } from '../sky/wcs-types.ts';
import { InputError } from '../units/input-error.ts';
import { convertQuantity } from '../units/quantity.ts';
import { formatBeam } from './assumptions.ts';
import { beamPixels } from './pixel-axes.ts';
import type { PixelAxes } from './pixel-axes.ts';
import type { DataEntry } from './study-types.ts';

/** A map or cube that a reader of files made; whatever is undefined its header does not say. */
export interface ReadMap {
  readonly file: string;
  readonly wcs: CelestialWcs;
  readonly nx: number;
  readonly ny: number;
  /** [channel * ny * nx + row * nx + column], row 0 first in the file. */
  readonly values: Float64Array;
  /** One per plane of `values`; undefined where the header lacks frequencies. */
  readonly channels?: readonly { readonly frequencyHz: number; readonly widthHz?: number }[];
  readonly unit?: string;
  readonly beam?: Beam;
  readonly quantity?: string;
}

/** Same size and, to a hundredth of a pixel at the corners, the same sky. */
export function sameGrid(map: ReadMap, { wcs, nx, ny }: PixelAxes): boolean {
  if (map.nx !== nx || map.ny !== ny) return false;
  const other = map.wcs;
  const pixel = Math.hypot(wcs.cd[0], wcs.cd[2]);
  const near = (a: number, b: number, tolerance: number): boolean => Math.abs(a - b) <= tolerance;
  return (
    other.projection === wcs.projection &&
    near(other.raDeg, wcs.raDeg, 0.01 * pixel) &&
    near(other.decDeg, wcs.decDeg, 0.01 * pixel) &&
    near(other.crpixX, wcs.crpixX, 0.01) &&
    near(other.crpixY, wcs.crpixY, 0.01) &&
    other.cd.every((value, k) => near(value, wcs.cd[k], (0.01 * pixel) / Math.max(nx, ny)))
  );
}

/** The unit of a map's values and the brightness unit it is brought to. Throws InputError where it has none. */
export function mapUnit(map: ReadMap, { unit, place }: DataEntry): { text: string; brightness: BrightnessUnit } {
  const text = unit?.text ?? knownSpelling(map.unit);
  if (text === undefined || text === '') {
    throw new InputError(`${map.file} does not say its unit; add \`unit: Jy/beam\` (or what it is) to its data entry`, place);
  }
  for (const brightness of ['Jy/beam', 'Jy/sr'] as const) {
    try {
      convertQuantity(1, text, brightness);
      return { text, brightness };
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
    }
  }
  throw new InputError(`${map.file} is in ${text}; allowed: Jy/beam and Jy/sr with their prefixes`, unit?.place ?? place);
}

/** Old headers write JY/BEAM; with a prefix capitals would be ambiguous (milli or mega) and are refused. */
function knownSpelling(unit: string | undefined): string | undefined {
  if (unit !== undefined && /^jy\/beam$/i.test(unit)) return 'Jy/beam';
  return unit !== undefined && /^jy\/sr$/i.test(unit) ? 'Jy/sr' : unit;
}

/** The channels of a map: its header's, or the entry's frequency. Throws InputError where neither says. */
export function mapChannels(map: ReadMap, entry: DataEntry, assumptions: string[]): Channel[] {
  const count = map.values.length / (map.nx * map.ny);
  const stated = map.channels ?? (count === 1 && entry.frequencyHz !== undefined ? [{ frequencyHz: entry.frequencyHz }] : undefined);
  if (!stated) {
    throw new InputError(
      count === 1
        ? `${map.file} does not say its frequency; add \`frequency: 1.4 GHz\` (or what it is) to its data entry`
        : `${map.file} holds ${count} planes without frequencies; give one file per channel under \`files\`, each with a FREQ axis`,
      entry.place,
    );
  }
  if (map.channels && entry.frequencyHz !== undefined && (count > 1 || Math.abs(map.channels[0].frequencyHz / entry.frequencyHz - 1) > 1e-6)) {
    throw new InputError(`\`frequency\` contradicts the header of ${map.file} (${map.channels[0].frequencyHz} Hz); leave it out`, entry.place);
  }
  return stated.map((channel) => {
    const widthHz = entry.widthHz ?? ('widthHz' in channel ? channel.widthHz : undefined);
    if (widthHz === undefined) assumptions.push(`${map.file}: no channel width is stated (\`width\`); assumed so narrow that nothing turns within it.`);
    return { frequencyHz: channel.frequencyHz, widthHz: widthHz ?? 0 };
  });
}

/** The beam of a map: the entry's, else its header's. Throws InputError where Jy/beam comes without one. */
export function mapBeam(map: ReadMap, entry: DataEntry, unit: BrightnessUnit, assumptions: string[]): Beam | undefined {
  const beam = entry.beam ?? map.beam;
  if (beam) {
    if (!entry.beam) assumptions.push(`${map.file}: beam ${formatBeam(beam)} from the header.`);
    return beam;
  }
  if (unit === 'Jy/beam') {
    throw new InputError(
      `${map.file} is in Jy/beam but does not say its beam; add \`beam: {major: 15 arcsec, minor: 12 arcsec, angle: 30 deg}\` to its data entry`,
      entry.place,
    );
  }
  assumptions.push(`${map.file}: no beam is stated; assumed sharp, each pixel a sightline.`);
  return undefined;
}

/** Shape of the noise's autocorrelation: as the entry says, else the beam's; undefined: independent pixels. */
export function noiseCorrelation(entry: DataEntry, beam: Beam | undefined, axes: PixelAxes, file: string, assumptions: string[]): Beam | undefined {
  const length = entry.correlationArcsec;
  if (length === 0) return undefined;
  const shape = length === undefined ? beam : { majorArcsec: length, minorArcsec: length, angle: 0 };
  if (!shape) assumptions.push(`${file}: noise assumed independent from pixel to pixel.`);
  else if (beamPixels(axes, shape) <= 1) {
    assumptions.push(`${file}: its noise correlation (${formatBeam(shape)}) covers less than a pixel; noise assumed independent from pixel to pixel.`);
    return undefined;
  } else if (length === undefined) assumptions.push(`${file}: noise assumed correlated as the beam; state \`correlation\` where it is not.`);
  return shape;
}
