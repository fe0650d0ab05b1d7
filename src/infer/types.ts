import type { Beam } from '../scene/types.ts';
import type { BrightnessUnit, Channel } from '../sky/types.ts';
import type { OtherData } from './other-data.ts';
import type { PixelAxes } from './pixel-axes.ts';

export type StokesQuantity = 'I' | 'Q' | 'U';

/** One map that the model is compared with: one Stokes parameter in one channel. */
export interface DataPlane {
  readonly quantity: StokesQuantity;
  /** Index into the data set's bands, and into the channels of that band. */
  readonly band: number;
  readonly channel: number;
  /** [row * nx + column], in the data set's unit and IAU signs; NaN where masked or blank. */
  readonly values: Float64Array;
  /** Noise rms, in the data set's unit: one number, or a map of it. */
  readonly noise: number | Float64Array;
  /** Shape of the noise's autocorrelation (FWHM of the beam); undefined: independent pixels. */
  readonly correlation?: Beam;
}

/** Channels seen with one beam. */
export interface DataBand {
  readonly name: string;
  readonly channels: readonly Channel[];
  readonly beam?: Beam;
}

/** All maps that hypotheses are compared with, on one grid. */
export interface DataSet {
  /** The grid that the model is brought to. */
  readonly axes: PixelAxes;
  readonly unit: BrightnessUnit;
  readonly bands: readonly DataBand[];
  readonly planes: readonly DataPlane[];
  /** What else is known: P, chi, RM in maps, profiles, spectra or behind the galaxy. */
  readonly others?: readonly OtherData[];
  /** Plain sentences on all that was assumed about signs, noise and beam, for the user to read. */
  readonly assumptions: readonly string[];
}
