import type { Beam } from '../scene/types.ts';
import type { BrightnessUnit, Channel } from '../sky/types.ts';
import type { CelestialWcs } from '../sky/wcs-types.ts';
import { InputError } from '../units/input-error.ts';
import { convertQuantity } from '../units/quantity.ts';
import { formatBeam } from './assumptions.ts';
import { beamPixels } from './pixel-axes.ts';
import type { PixelAxes } from './pixel-axes.ts';
import type { DataEntry } from './study-types.ts';

/** An image or cube as a reader of files gives it; whatever is undefined or empty its header does not say. */
export interface ReadMap {
  readonly file: string;
  readonly wcs: CelestialWcs;
  readonly nx: number;
  readonly ny: number;
  /** Names of the Stokes planes; empty where the file does not tell (one plane then). */
  readonly stokes: readonly string[];
  /** What the map shows, where it is no Stokes parameter. */
  readonly quantity?: string;
  readonly channels?: readonly Channel[];
  /** Along a Faraday-depth axis. */
  readonly depthsRadM2?: readonly number[];
  /** [((stokes * channels + channel) * ny + row) * nx + column]. */
  readonly values: Float64Array;
  readonly unit: string;
  readonly beam?: Beam;
  /** rms per channel in `unit`. */
  readonly noise?: readonly number[];
  readonly convention?: 'IAU' | 'U-reversed';
  /** What the reader assumed, for the user. */
  readonly notes?: readonly string[];
}

/** The planes of one Stokes parameter, [channel * ny * nx + row * nx + column]. Throws InputError where a map has none. */
export function stokesPlanes(map: ReadMap, { quantity, place }: DataEntry): Float64Array {
  const { stokes, values, depthsRadM2 } = map;
  const held = depthsRadM2 ? 'a Faraday spectrum' : stokes.length > 0 ? `Stokes ${stokes.join(', ')}` : map.quantity;
  if (held !== undefined && (depthsRadM2 || (stokes.length > 0 ? !stokes.includes(quantity) : map.quantity !== quantity))) {
    throw new InputError(`${map.file} holds ${held} by its header, not ${quantity}`, place);
  }
  const count = Math.max(1, stokes.length);
  const size = values.length / count;
  if (!Number.isInteger(size / (map.nx * map.ny))) {
    throw new Error(`${map.file} holds ${values.length} values, no whole number of ${count} x ${map.nx} x ${map.ny} planes.`);
  }
  const from = Math.max(0, stokes.indexOf(quantity)) * size;
  return values.subarray(from, from + size);
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
  if (text === '') {
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
function knownSpelling(unit: string): string {
  if (/^jy\/beam$/i.test(unit)) return 'Jy/beam';
  return /^jy\/sr$/i.test(unit) ? 'Jy/sr' : unit;
}

/** The channels of `count` planes: their header's, or the entry's frequency. Throws InputError where neither says. */
export function mapChannels(map: ReadMap, entry: DataEntry, count: number, assumptions: string[]): readonly Channel[] {
  const { file, channels } = map;
  const { frequencyHz, widthHz, place } = entry;
  if (channels) {
    const differs = frequencyHz !== undefined && (count > 1 || Math.abs(channels[0].frequencyHz / frequencyHz - 1) > 1e-6);
    if (differs) throw new InputError(`\`frequency\` contradicts the header of ${file} (${channels[0].frequencyHz} Hz); leave it out`, place);
    return channels.map((channel) => ({ frequencyHz: channel.frequencyHz, widthHz: widthHz ?? channel.widthHz }));
  }
  if (count > 1) {
    throw new InputError(`${file} holds ${count} planes without frequencies; give one file per channel under \`files\`, each with its FREQ axis`, place);
  }
  if (frequencyHz === undefined) {
    throw new InputError(`${file} does not say its frequency; add \`frequency: 1.4 GHz\` (or what it is) to its data entry`, place);
  }
  if (widthHz === undefined) assumptions.push(`${file}: no channel width is stated (\`width\`); assumed so narrow that nothing turns within it.`);
  return [{ frequencyHz, widthHz: widthHz ?? 0 }];
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
export function noiseCorrelation(
  entry: DataEntry, beam: Beam | undefined, axes: PixelAxes, file: string, assumptions: string[],
): Beam | undefined {
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
