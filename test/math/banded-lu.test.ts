import { Matrix, solve } from 'ml-matrix';
import { describe, expect, it } from 'vitest';
import { factorShifted, solveBandedLu } from '../../src/math/banded-lu.ts';
import { randomStream } from '../../src/math/random.ts';
import { multiplySparse, sparseFromEntries, type SparseMatrix } from '../../src/math/sparse.ts';

/** A matrix with random entries in a band, its diagonal weak enough that rows must change places. */
function randomBand(size: number, below: number, above: number, seed: number): SparseMatrix {
  const random = randomStream(seed, 'band');
  const [rows, columns, values]: number[][] = [[], [], []];
  for (let i = 0; i < size; i++) {
    for (let j = Math.max(0, i - below); j <= Math.min(size - 1, i + above); j++) {
      rows.push(i);
      columns.push(j);
      values.push(i === j ? 1e-9 * random.gaussian() : random.gaussian());
    }
  }
  return sparseFromEntries(size, rows, columns, values);
}

describe('banded LU', () => {
  it.each([[1, 0, 0], [12, 1, 1], [40, 3, 5], [40, 7, 2], [9, 20, 20]])('solves %i unknowns, band %i below and %i above, as a dense solver does', (size, below, above) => {
    const matrix = randomBand(size, below, above, 7 * size);
    const random = randomStream(3, 'right side');
    const y = Float64Array.from({ length: size }, () => random.gaussian());
    const x = solveBandedLu(factorShifted(matrix, 0.25, -2), y);
    // 0.25 x - 2 M x = y again; and ml-matrix's dense LU.
    const back = multiplySparse(matrix, x).map((value, i) => 0.25 * x[i] - 2 * value);
    const dense = Matrix.eye(size, size, 0.25);
    for (let i = 0; i < size; i++) {
      for (let k = matrix.rowStart[i]; k < matrix.rowStart[i + 1]; k++) dense.set(i, matrix.columns[k], dense.get(i, matrix.columns[k]) - 2 * matrix.values[k]);
    }
    const expected = solve(dense, Matrix.columnVector(Array.from(y))).to1DArray();
    for (let i = 0; i < size; i++) {
      // Rounding times the condition of a random matrix of this size.
      expect(Math.abs(back[i] - y[i])).toBeLessThan(1e-10);
      expect(Math.abs(x[i] - expected[i])).toBeLessThan(1e-9 * Math.max(...expected.map(Math.abs)));
    }
  });

  it('refuses a singular matrix', () => {
    expect(() => factorShifted(sparseFromEntries(3, [0, 1], [0, 1], [1, 1]), 0, 1)).toThrow(/singular/);
  });
});
