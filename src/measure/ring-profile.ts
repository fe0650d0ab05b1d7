import { asymmetry, type Asymmetry } from './asymmetry.ts';
import type { DiscOrientation, MapFrame } from './disc.ts';
import { fitHarmonics, type HarmonicFit } from './harmonics.ts';
import type { MeasuredMaps } from './region.ts';
import { measureRings, type Sector } from './rings.ts';

/** A ring of the disc and into how many sectors it is cut. */
export interface Ring {
  readonly innerKpc: number;
  readonly outerKpc: number;
  readonly sectors: number;
}

/** What is seen round one ring: sectors, their harmonics and asymmetries in P and RM. */
export interface RingProfile {
  readonly ring: Ring;
  readonly sectors: readonly Sector[];
  /** Undefined where the sectors do not hold enough pixels to tell. */
  readonly harmonicsP?: HarmonicFit;
  readonly harmonicsRm?: HarmonicFit;
  /** Of P: approaching against receding, and near against far. */
  readonly approachingReceding: Asymmetry;
  readonly nearFar: Asymmetry;
}

/** Harmonics are fitted up to this order. */
const highestOrder = 3;

/** Measures one ring of maps. Throws InputError as `measureRings` does. */
export function ringProfile(maps: MeasuredMaps, frame: MapFrame, orientation: DiscOrientation, ring: Ring): RingProfile {
  const [sectors] = measureRings(maps, frame, orientation, { edgesKpc: [ring.innerKpc, ring.outerKpc], sectors: ring.sectors });
  const azimuth = sectors.map((sector) => sector.azimuth);
  const P = sectors.map((sector) => sector.P.value);
  const errors = sectors.map((sector) => sector.P.error);
  const rm = sectors.map((sector) => sector.rm?.value ?? NaN);
  const rmErrors = sectors.map((sector) => sector.rm?.error ?? 0);
  return {
    ring,
    sectors,
    harmonicsP: harmonicsOf(azimuth, P, errors),
    harmonicsRm: harmonicsOf(azimuth, rm, rmErrors),
    approachingReceding: asymmetry(azimuth, P, errors, 'approaching-receding'),
    nearFar: asymmetry(azimuth, P, errors, 'near-far'),
  };
}

/** A ring that suits a galaxy of the given extent: the middle of its bright disc, in 24 sectors. */
export function defaultRing(volumeRadiusKpc: number): Ring {
  return { innerKpc: 0.25 * volumeRadiusKpc, outerKpc: 0.5 * volumeRadiusKpc, sectors: 24 };
}

function harmonicsOf(azimuth: readonly number[], values: readonly number[], errors: readonly number[]): HarmonicFit | undefined {
  const filled = values.filter(Number.isFinite).length;
  return filled > 2 * highestOrder + 1 ? fitHarmonics(azimuth, values, errors, highestOrder) : undefined;
}
