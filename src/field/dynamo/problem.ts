import { factorBytes } from '../../math/banded-lu.ts';
import { discGrid, type DiscGridOptions, type Parity } from './grid.ts';
import type { DynamoProfiles, Surroundings } from './profiles.ts';

/** Everything the solver needs. */
export interface DynamoProblem {
  /** Within the volume; outside it the surroundings take over. */
  readonly profiles: DynamoProfiles;
  readonly surroundings: Surroundings;
  /** The coarser of the two grids. */
  readonly grid: DiscGridOptions;
  /** Parities that are solved; `mixed` alone where the profiles are not symmetric about the plane. */
  readonly parities: readonly Parity[];
  /** Modes of each parity. */
  readonly modes: number;
  /** The state whose field is wanted: quenched, or the fastest mode of the linear equations. */
  readonly state: 'saturated' | 'mode';
}

/** The grid of twice the cells. */
export function finerCells(grid: DiscGridOptions): DiscGridOptions {
  return { ...grid, radialCells: 2 * grid.radialCells, verticalCells: 2 * grid.verticalCells };
}

/**
 * Whether the profiles keep parities apart: alpha and the vertical wind odd in z, the rest even. Looked at
 * over the volume, to rounding.
 */
export function isSymmetric({ angularSpeed, alpha, diffusivity, windRadial, windVertical, equipartition }: DynamoProfiles, radiusKpc: number, heightKpc: number): boolean {
  const signs = [[angularSpeed, 1], [alpha, -1], [diffusivity, 1], [windRadial, 1], [windVertical, -1], [equipartition, 1]] as const;
  return signs.every(([profile, sign]) => {
    let [difference, size] = [0, 0];
    for (let a = 1; a <= 23; a++) {
      for (let b = 1; b <= 23; b++) {
        const [r, z] = [(a / 23) * radiusKpc, (b / 23) ** 2 * heightKpc];
        difference = Math.max(difference, Math.abs(profile(r, z) - sign * profile(r, -z)));
        size = Math.max(size, Math.abs(profile(r, z)));
      }
    }
    return difference <= 1e-9 * size;
  });
}

/** Bytes that the factors of a problem's largest matrix may need. */
export function factorisationBytes({ grid, parities }: DynamoProblem): number {
  const { radiiKpc, heightsKpc } = discGrid(finerCells(grid), parities[0]);
  const band = 2 * Math.min(radiiKpc.length, heightsKpc.length);
  return factorBytes(2 * radiiKpc.length * heightsKpc.length, band, band);
}
