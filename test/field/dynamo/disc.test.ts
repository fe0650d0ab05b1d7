import { describe, expect, it } from 'vitest';
import { discGrid, slabGrid } from '../../../src/field/dynamo/grid.ts';
import { searchModes } from '../../../src/field/dynamo/modes.ts';
import { discretise, linearMatrix } from '../../../src/field/dynamo/operator.ts';
import { withSurroundings, type DynamoProfiles } from '../../../src/field/dynamo/profiles.ts';
import { rateScale } from '../../../src/field/dynamo/scales.ts';
import { needPython, pythonJson } from '../../support/tools.ts';
import { smallGrid, smallProblem, smoothDisc } from './disc.ts';

const surroundings = smallProblem(smoothDisc()).surroundings;

describe('a disc with its halo', () => {
  it('has the eigenvalues that scipy finds of the same matrix', (context) => {
    needPython(context, 'scipy', 'numpy');
    const operator = discretise(discGrid(smallGrid, 'odd'), withSurroundings(smoothDisc(20), surroundings));
    const matrix = linearMatrix(operator, operator.alpha);
    const modes = searchModes(matrix, 4, rateScale(operator));
    const data = { size: matrix.size, start: Array.from(matrix.rowStart), columns: Array.from(matrix.columns), values: Array.from(matrix.values) };
    // All eigenvalues by LAPACK, and the nearest to the shift by scipy.sparse.linalg.eigs.
    const python = `
import sys, json, numpy as np, scipy.sparse as sp, scipy.sparse.linalg as la
d = json.load(sys.stdin)
m = sp.csc_matrix(sp.csr_matrix((d['values'], d['columns'], d['start']), shape=(d['size'], d['size'])))
dense = np.linalg.eigvals(m.toarray())
near = la.eigs(m, k=6, sigma=${modes[0].growthRate + 0.5}, return_eigenvectors=False)
lead = lambda v: [[z.real, z.imag] for z in sorted(v, key=lambda z: -z.real) if z.imag > -1e-9]
print(json.dumps({'dense': lead(dense)[:4], 'near': lead(near)}))`;
    const { dense, near } = pythonJson(python, [], JSON.stringify(data)) as Record<'dense' | 'near', [number, number][]>;
    modes.forEach(({ growthRate, frequency }, k) => {
      // LAPACK's eigenvalues of a matrix with entries up to 1e5 and a strong shear are good to about 1e-9.
      expect(Math.hypot(growthRate - dense[k][0], Math.abs(frequency) - dense[k][1])).toBeLessThan(1e-6 * (1 + Math.abs(growthRate)));
    });
    expect(Math.hypot(modes[0].growthRate - near[0][0], Math.abs(modes[0].frequency) - near[0][1])).toBeLessThan(1e-7);
  });

  it('converges with the second order for smooth profiles', () => {
    const profiles = withSurroundings(smoothDisc(), surroundings);
    const rates = [1, 2, 4].map((times) => {
      const operator = discretise(discGrid({ ...smallGrid, radialCells: 8 * times, verticalCells: 8 * times }, 'even'), profiles);
      return searchModes(linearMatrix(operator, operator.alpha), 1, rateScale(operator))[0].growthRate;
    });
    const order = Math.log2(Math.abs((rates[1] - rates[0]) / (rates[2] - rates[1])));
    expect(order).toBeGreaterThan(1.7);
    expect(order).toBeLessThan(2.6);
  });

  it('tends to the one-dimensional limit where it is thin', () => {
    // alpha falls slowly along r: radial terms are of the order of h over that scale.
    const h = 0.1;
    const shear = -10;
    const profiles: DynamoProfiles = {
      angularSpeed: (r) => shear * Math.log(Math.max(r, 1e-3)),
      alpha: (r, z) => (Math.abs(z) < h ? 3 * Math.sin((Math.PI * z) / h) * Math.exp(-(((r - 5) / 4) ** 2)) : 0),
      diffusivity: (_, z) => (Math.abs(z) <= h ? 0.02 : 20),
      windRadial: () => 0,
      windVertical: () => 0,
      equipartition: () => 1,
    };
    const grid = discGrid({ radiusKpc: 10, heightKpc: 0.2, radialCells: 40, verticalCells: 24, reach: 1 }, 'even');
    const operator = discretise(grid, profiles);
    const [disc] = searchModes(linearMatrix(operator, operator.alpha), 1, rateScale(operator));
    const column = discretise(slabGrid(5, h, 60, 'even'), profiles);
    const [slab] = searchModes(linearMatrix(column, column.alpha), 1, rateScale(column));
    expect(slab.growthRate).toBeGreaterThan(0);
    // The disc's surface lies between two nodes, h/12 apart; 3 % were seen.
    expect(Math.abs(disc.growthRate / slab.growthRate - 1)).toBeLessThan(0.05);
  });

  it('needs no symmetry: the modes of the whole grid are those of both parities', () => {
    const profiles = withSurroundings(smoothDisc(10), surroundings);
    const ratesOf = (parity: 'even' | 'odd' | 'mixed'): readonly number[] => {
      const operator = discretise(discGrid({ ...smallGrid, radialCells: 8, verticalCells: 10 }, parity), profiles);
      return searchModes(linearMatrix(operator, operator.alpha), 4, rateScale(operator)).map(({ growthRate }) => growthRate);
    };
    const both = [...ratesOf('even'), ...ratesOf('odd')].sort((a, b) => b - a);
    ratesOf('mixed').forEach((rate, k) => expect(Math.abs(rate - both[k])).toBeLessThan(1e-6));
  });
});
