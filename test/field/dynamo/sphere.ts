import { discGrid, type EndCondition } from '../../../src/field/dynamo/grid.ts';
import { refineModes, searchModes, type Mode } from '../../../src/field/dynamo/modes.ts';
import { discretise, linearMatrix } from '../../../src/field/dynamo/operator.ts';

/** A sphere of radius 1 and diffusivity 1 with uniform alpha, in surroundings that diffuse 2000 times faster. */
export function sphereModes(alpha: number, cells: number, ends: { readonly potential: EndCondition; readonly azimuthal: EndCondition }, count = 1, known?: readonly Mode[]): readonly Mode[] {
  const none = (): number => 0;
  const isInside = (r: number, z: number): boolean => r * r + z * z < 1;
  const grid = discGrid({ radiusKpc: 1.25, heightKpc: 1.25, radialCells: cells, verticalCells: cells, reach: 4 }, 'even', ends);
  const operator = discretise(grid, {
    angularSpeed: none,
    alpha: (r, z) => (isInside(r, z) ? alpha : 0),
    diffusivity: (r, z) => (isInside(r, z) ? 1 : 2000),
    windRadial: none,
    windVertical: none,
    equipartition: () => 1,
  });
  const matrix = linearMatrix(operator, operator.alpha);
  const rate = 10 + alpha ** 2 / 4;
  return known ? refineModes(matrix, known, count, rate) : searchModes(matrix, count, rate);
}

/** C_alpha at which the leading mode neither grows nor decays, by secants; each start is the last mode. */
export function criticalAlpha(cells: number): number {
  const ends = { potential: 'mirror', azimuthal: 'mirror' } as const;
  let [a, b] = [4.4, 4.6];
  let modes = sphereModes(a, cells, ends);
  let ga = modes[0].growthRate;
  modes = sphereModes(b, cells, ends, 1, modes);
  let gb = modes[0].growthRate;
  for (let k = 0; k < 3; k++) {
    const next = b - (gb * (b - a)) / (gb - ga);
    [a, ga] = [b, gb];
    b = next;
    modes = sphereModes(b, cells, ends, 1, modes);
    gb = modes[0].growthRate;
  }
  return b;
}
