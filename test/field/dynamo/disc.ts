import type { DiscGridOptions } from '../../../src/field/dynamo/grid.ts';
import type { DynamoProblem } from '../../../src/field/dynamo/problem.ts';
import type { DynamoProfiles } from '../../../src/field/dynamo/profiles.ts';

/** A smooth galaxy of 10 kpc with a disc of 0.8 kpc; speeds in km/s, kpc. The wind is straight up. */
export function smoothDisc(windKms = 0): DynamoProfiles {
  const h = 0.8;
  return {
    angularSpeed: (r) => 200 / Math.sqrt(r * r + 9),
    alpha: (r, z) => 1.2 * Math.exp(-((r / 8) ** 2)) * (z / h) * Math.exp(0.5 - (z / h) ** 2 / 2),
    diffusivity: (_, z) => 0.35 * (4 - 3 * Math.exp(-((z / 2) ** 2))),
    windRadial: () => 0,
    windVertical: (_, z) => (windKms * (z / 2) ** 3) / (1 + Math.abs(z / 2) ** 3),
    equipartition: () => 4,
  };
}

export const smallGrid: DiscGridOptions = { radiusKpc: 10, heightKpc: 4, radialCells: 12, verticalCells: 16, reach: 2 };

/** A problem small enough for a test. */
export function smallProblem(profiles: DynamoProfiles, more: Partial<DynamoProblem> = {}): DynamoProblem {
  return {
    profiles,
    surroundings: { radiusKpc: smallGrid.radiusKpc, heightKpc: smallGrid.heightKpc, ratio: 1000 },
    grid: smallGrid,
    parities: ['even'],
    modes: 1,
    state: 'saturated',
    ...more,
  };
}
