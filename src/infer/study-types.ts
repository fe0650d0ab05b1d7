import type { Beam } from '../scene/types.ts';
import type { Place } from '../units/input-error.ts';
import type { StokesQuantity } from './types.ts';

/** A value that a study gives as text with a unit, and where. */
export interface PlacedText {
  readonly text: string;
  readonly place: Place;
}

/** One entry of a study's `data`. Whatever is undefined was not said. */
export interface DataEntry {
  readonly quantity: StokesQuantity;
  /** One file, or one per channel; as written, relative to the study. */
  readonly files: readonly string[];
  /** rms with its unit, or the file of a map of it; neither: as the maps' headers say. */
  readonly noise?: PlacedText;
  readonly noiseMap?: string;
  readonly frequencyHz?: number;
  readonly widthHz?: number;
  readonly beam?: Beam;
  /** File of a map: 0 and blank are masked. */
  readonly mask?: string;
  /** Subtracted from the data. */
  readonly zeroLevel?: PlacedText;
  /** Of the maps' values, where their headers lack it. */
  readonly unit?: PlacedText;
  readonly convention?: 'IAU' | 'U-reversed';
  readonly angleOf?: 'E' | 'B';
  /** FWHM of the noise's autocorrelation, arcsec; 0: independent pixels. Undefined: the beam. */
  readonly correlationArcsec?: number;
  readonly place: Place;
}

/** The prior of one free parameter as written, before the scene says its unit. */
export interface FreeText {
  readonly path: string;
  readonly kind: 'uniform' | 'logUniform' | 'normal';
  /** [low, high] or [mean, sigma]. */
  readonly values: readonly [PlacedText, PlacedText];
  readonly place: Place;
}

export interface Hypothesis {
  readonly name: string;
  /** File of the scene, as written, relative to the study. */
  readonly scene: string;
  readonly free: readonly FreeText[];
  readonly place: Place;
}

/** A checked study file. */
export interface Study {
  readonly title: string;
  readonly data: readonly DataEntry[];
  readonly hypotheses: readonly Hypothesis[];
  readonly method: 'least-squares';
  readonly seed: number;
}
