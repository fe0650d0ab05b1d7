import type { Beam } from '../scene/types.ts';
import type { Channel } from '../sky/types.ts';
import type { CelestialWcs } from '../sky/wcs-types.ts';
import type { StokesName } from './sky-header.ts';

/** What a user states of a map whose header lacks it or is wrong: it goes before the header. */
export interface SkyImageOverrides {
  /** Which HDU holds the image (0: primary); else the first with data. */
  readonly hduIndex?: number;
  /** One, or one per channel. */
  readonly frequencyHz?: number | readonly number[];
  /** Of every channel; 0 is monochromatic. */
  readonly widthHz?: number;
  readonly beam?: Beam;
  readonly unit?: string;
  /** rms per channel in the image's unit. */
  readonly noise?: number;
  readonly convention?: 'IAU' | 'U-reversed';
}

/** An image or cube of the sky as a file states it; what it does not state is undefined. */
export interface SkyImage {
  readonly nx: number;
  readonly ny: number;
  /** The root of a pixel's area. */
  readonly pixelArcsec: number;
  readonly wcs: CelestialWcs;
  readonly channels?: readonly Channel[];
  /** Along a Faraday-depth axis, rad m^-2. */
  readonly depthsRadM2?: readonly number[];
  /** Names of the planes; empty where the file does not tell (one plane then). */
  readonly stokes: readonly StokesName[];
  /** Of this program's own maps. */
  readonly quantity?: string;
  readonly band?: string;
  /** BUNIT; empty where the header has none. */
  readonly unit: string;
  readonly beam?: Beam;
  /** rms per channel in `unit`. */
  readonly noise?: readonly number[];
  readonly convention?: 'IAU' | 'U-reversed';
  /** [((stokes * channels + channel) * ny + row) * nx + column]; NaN is blank. */
  readonly values: Float64Array;
  /** What was assumed or left aside, one sentence each: to be shown to the user. */
  readonly notes: readonly string[];
}
