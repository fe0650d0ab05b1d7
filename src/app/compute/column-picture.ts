import type { AzimuthValues } from '../../figure/azimuth-profile.ts';
import type { MapView } from '../../figure/overview.ts';
import type { FieldLine } from '../../ray/field-lines.ts';
import type { CelestialWcs } from '../../sky/wcs-types.ts';

/** The maps of one band of a column. */
export interface BandPicture {
  /** `1.40 GHz`. */
  readonly label: string;
  readonly frequencyHz: number;
  readonly polarization: MapView;
  /** P has been freed of the bias of noise. */
  readonly isDebiased: boolean;
  /** P round the ring; undefined where the disc is seen too nearly edge-on. */
  readonly ring?: AzimuthValues;
}

/** How a galaxy lies, for its shape and the linked cursor. */
export interface Pose {
  readonly inclination: number;
  readonly positionAngle: number;
  readonly distanceKpc: number;
  readonly radiusKpc: number;
  readonly heightKpc: number;
}

/** All that the line-up shows of one column, bands in order of wavelength, longest first. */
export interface ColumnPicture {
  readonly pose: Pose;
  readonly bands: readonly BandPicture[];
  /** Of every map. */
  readonly wcs: CelestialWcs;
  readonly rotationMeasure?: MapView;
  readonly rotationMeasureRing?: AzimuthValues;
  readonly lines: readonly FieldLine[];
  /** What symmetry forbids, in plain sentences. */
  readonly symmetry: readonly string[];
  /** Against the observation, where there is one. */
  readonly fit?: { readonly chi2: number; readonly count: number };
  /** False for a preview on coarser pixels and looser tolerance. */
  readonly exact: boolean;
  readonly seconds: number;
}

/** The observation's own column: its maps, and its points round the ring of a scene's galaxy. */
export interface ObservedPicture {
  readonly bands: readonly BandPicture[];
  readonly wcs: CelestialWcs;
  readonly rotationMeasure?: MapView;
  readonly rotationMeasureRing?: AzimuthValues;
  readonly assumptions: readonly string[];
}
