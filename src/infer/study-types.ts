import type { Beam } from '../scene/types.ts';
import type { Channel } from '../sky/types.ts';
import type { Place } from '../units/input-error.ts';
import type { Prior } from './prior.ts';
import type { SectorGrid } from './sector-basis.ts';
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

/** An entry of a study's `data` that is no Stokes map. Whatever is undefined was not said. */
export interface OtherEntry {
  readonly quantity: 'P' | 'chi' | 'RM';
  readonly kind: 'map' | 'sectors' | 'spectrum' | 'sources';
  /** As written, relative to the study. */
  readonly file: string;
  readonly noise?: PlacedText;
  readonly unit?: PlacedText;
  readonly mask?: string;
  readonly angleOf?: 'E' | 'B';
  readonly frequencyHz?: number;
  readonly widthHz?: number;
  readonly beam?: Beam;
  /** Frequencies that an RM was made from. */
  readonly fromHz?: readonly number[];
  /** Inner and outer radius of a profile. */
  readonly ringKpc?: readonly [number, number];
  /** Of sources by themselves, beside the error of each. */
  readonly scatter?: PlacedText;
  readonly place: Place;
}

/** The prior of one free parameter as written, before the scene says its unit. */
export interface FreeText {
  readonly path: string;
  readonly kind: Prior['kind'];
  /** [low, high] or [mean, sigma]. */
  readonly values: readonly [PlacedText, PlacedText];
  readonly place: Place;
}

/** A number that follows from others: that of a path (tied), or one for the posterior only (derived). */
export interface FormulaText {
  readonly name: string;
  readonly formula: string;
  /** Names in the formula and the scene's paths that they stand for. */
  readonly where: Readonly<Record<string, string>>;
  /** Of a derived number, as written; '' for a tie. */
  readonly unit: string;
  readonly place: Place;
}

export interface Hypothesis {
  readonly name: string;
  /** File of the scene, as written, relative to the study. */
  readonly scene: string;
  readonly free: readonly FreeText[];
  readonly tied: readonly FormulaText[];
  readonly derived: readonly FormulaText[];
  readonly place: Place;
}

/** How posteriors are found. */
export type Method = 'least-squares' | 'walkers' | 'nested';

/** The prior of the foreground's depth; `place` is missing where it is the default. */
export type ForegroundText = Pick<FreeText, 'kind' | 'values' | 'place'> | 'default';

/** A band that could be observed, on the grid of the data. */
export interface CandidateBand {
  readonly name: string;
  readonly channels: readonly Channel[];
  readonly beam?: Beam;
  /** rms of Q and U per channel. */
  readonly noise: PlacedText;
  /** Observing time over that in which the noise is reached: noise falls as 1/sqrt. */
  readonly time: number;
}

/** How scenes with drawn turbulence are judged. */
export interface TurbulenceJudge extends SectorGrid {
  /** Realisations that the covariance is estimated from. */
  readonly realisations: number;
  /** Realisations that every model is the mean of; the first ones of those. */
  readonly mean: number;
}

/** A checked study file. */
export interface Study {
  readonly title: string;
  readonly data: readonly DataEntry[];
  readonly others: readonly OtherEntry[];
  readonly hypotheses: readonly Hypothesis[];
  readonly method: Method;
  /** Bands between which `forecast` chooses; none where the study has none. */
  readonly candidates: readonly CandidateBand[];
  /** Prior of the foreground's Faraday depth where a hypothesis does not free it; undefined: held fixed. */
  readonly foreground?: ForegroundText;
  /** Prior of one factor a band, on the model. */
  readonly calibration: readonly FreeText[];
  /** How hypotheses whose turbulence is drawn are judged; `single`: by the one realisation of their scene. */
  readonly turbulence: TurbulenceJudge | 'single';
  readonly seed: number;
}
