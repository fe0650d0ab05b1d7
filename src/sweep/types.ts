import type { Ring } from '../measure/ring-profile.ts';
import type { Scene } from '../scene/types.ts';
import type { Place } from '../units/input-error.ts';

/** What can be measured on every scene of a sweep. */
export const measureNames = ['asymmetry', 'harmonics', 'polarization', 'depolarization', 'gradient', 'origin-height', 'detectability'] as const;
export type MeasureName = (typeof measureNames)[number];

/** Maps that can be kept of every point. */
export const mapNames = ['I', 'Q', 'U', 'P', 'fraction', 'chi', 'RM', 'origin-height'] as const;
export type MapName = (typeof mapNames)[number];

export type Spacing = 'linear' | 'log' | 'cos';

/** A text with its place in the sweep file. */
export interface PlacedText {
  readonly text: string;
  readonly place: Place;
}

/** One entry of `vary` as it stands in the file. */
export interface VaryText {
  readonly path: string;
  readonly place: Place;
  readonly list?: readonly PlacedText[];
  readonly range?: { readonly from: PlacedText; readonly to: PlacedText; readonly steps?: number; readonly spacing: Spacing };
}

export type DesignName = 'grid' | 'sobol' | 'sensitivity';

/** A sweep file: checked but for what depends on its scenes. */
export interface SweepFile {
  readonly title: string;
  /** Scene files by name, at least one; `place` is that of the file's name. */
  readonly scenes: readonly { readonly name: string; readonly file: string; readonly place: Place }[];
  readonly vary: readonly VaryText[];
  readonly design: DesignName;
  readonly samples: number;
  readonly seed: number;
  /** 0: what is expected, with the errors that noise would make, but none drawn. */
  readonly realisations: number;
  readonly noise?: PlacedText;
  readonly measures: readonly MeasureName[];
  readonly maps: readonly MapName[];
  readonly ring?: readonly [number, number];
  readonly sectors: number;
  /** Sigma that counts as seen. */
  readonly threshold: number;
  readonly heatMap?: { readonly paths: readonly [string, string]; readonly place: Place };
}

/** A quantity that is varied. Numbers in `unit`. */
export interface SweepAxis {
  readonly path: string;
  readonly unit: string;
  readonly shownUnit: string;
  readonly meaning: string;
  /** Every value of a grid or list, in order; of a range of random designs its two ends. */
  readonly values: readonly number[];
  readonly spacing: Spacing | 'list';
}

/** A scene that the design is applied to: one of the sweep's, with one value of every choice. */
export interface SweepVariant {
  /** Such as `helical, field.halo.parity odd`; unique. */
  readonly name: string;
  readonly sceneName: string;
  /** Values of varied words, in the order of the plan's `choices`. */
  readonly choices: readonly string[];
  readonly scene: Scene;
  /** Text of the scene with choices and flags written into it. */
  readonly sceneText: string;
}

/** Everything that decides a sweep's rows; plain data. */
export interface SweepPlan {
  readonly title: string;
  readonly variants: readonly SweepVariant[];
  /** Paths whose values are words. */
  readonly choices: readonly string[];
  readonly axes: readonly SweepAxis[];
  readonly design: DesignName;
  readonly samples: number;
  readonly seed: number;
  readonly realisations: number;
  readonly measures: readonly MeasureName[];
  readonly maps: readonly MapName[];
  readonly ring: Ring;
  readonly threshold: number;
  /** Axes of the heat map. */
  readonly heatMap?: readonly [number, number];
}
