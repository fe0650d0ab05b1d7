import { bandOf, type SparseMatrix } from './sparse.ts';

/**
 * LU factors of a banded matrix with row interchanges where the diagonal is too small to divide by. `lower[j]` holds the
 * multipliers of the rows below row j, `upper[j]` row j from its diagonal on, `pivots[j]` the row that
 * changed places with row j.
 */
export interface BandedLu {
  readonly size: number;
  readonly lower: readonly Float64Array[];
  readonly upper: readonly Float64Array[];
  readonly pivots: Int32Array;
}

/** The diagonal stays pivot down to this share of the largest entry below it: interchanges double the band. */
const pivotShare = 1e-3;

/** Bytes that the factors of a matrix of this size and band need where rows are interchanged at worst. */
export function factorBytes(size: number, below: number, above: number): number {
  return 8 * size * (2 * below + above + 1);
}

/**
 * Factors diagonal·1 + scale·matrix. Rows are eliminated in a window of the band's height that fits in
 * the processor's cache. Throws RangeError where the matrix is singular.
 */
export function factorShifted(matrix: SparseMatrix, diagonal: number, scale: number): BandedLu {
  const { size } = matrix;
  const { below, above } = bandOf(matrix);
  const slots = below + 1;
  const width = 2 * below + above + 1;
  // Row i of the window holds columns base[slot] … base[slot] + width - 1, none beyond reach[slot].
  const active = Array.from({ length: slots }, () => new Float64Array(width));
  const base = new Int32Array(slots);
  const reach = new Int32Array(slots);
  const enter = (i: number): void => {
    const slot = i % slots;
    const row = active[slot].fill(0);
    base[slot] = i - below;
    reach[slot] = Math.min(i + above, size - 1);
    row[below] += diagonal;
    for (let k = matrix.rowStart[i]; k < matrix.rowStart[i + 1]; k++) row[matrix.columns[k] - base[slot]] += scale * matrix.values[k];
  };
  const lower: Float64Array[] = [];
  const upper: Float64Array[] = [];
  const pivots = new Int32Array(size);
  for (let i = 0; i < Math.min(below, size); i++) enter(i);
  for (let j = 0; j < size; j++) {
    if (j + below < size) enter(j + below);
    const last = Math.min(j + below, size - 1);
    const pivot = pivotOfColumn(active, base, j, last);
    pivots[j] = pivot;
    const [slot, other] = [j % slots, pivot % slots];
    [active[slot], active[other]] = [active[other], active[slot]];
    [base[slot], base[other]] = [base[other], base[slot]];
    [reach[slot], reach[other]] = [reach[other], reach[slot]];
    if (pivot > j) {
      // The row put off has room again for what later rows bring.
      active[other].copyWithin(0, j - base[other]).fill(0, width - (j - base[other]));
      base[other] = j;
    }
    const top = active[slot].slice(j - base[slot], reach[slot] - base[slot] + 1);
    if (!(Math.abs(top[0]) > 0)) throw new RangeError(`the matrix is singular at row ${j}`);
    const multipliers = new Float64Array(last - j);
    for (let i = j + 1; i <= last; i++) {
      const at = i % slots;
      const row = active[at];
      const start = j - base[at];
      const multiplier = row[start] / top[0];
      multipliers[i - j - 1] = multiplier;
      if (multiplier === 0) continue;
      reach[at] = Math.max(reach[at], reach[slot]);
      for (let c = 1; c < top.length; c++) row[start + c] -= multiplier * top[c];
    }
    lower.push(multipliers);
    upper.push(top);
  }
  return { size, lower, upper, pivots };
}

function pivotOfColumn(active: readonly Float64Array[], base: Int32Array, column: number, last: number): number {
  let best = column;
  let largest = -1;
  for (let i = column; i <= last; i++) {
    const slot = i % active.length;
    const value = Math.abs(active[slot][column - base[slot]]);
    if (value > largest) [best, largest] = [i, value];
  }
  const diagonal = Math.abs(active[column % active.length][column - base[column % active.length]]);
  return diagonal >= pivotShare * largest ? column : best;
}

/** x of matrix·x = y. */
export function solveBandedLu({ size, lower, upper, pivots }: BandedLu, y: Float64Array): Float64Array {
  const x = y.slice();
  for (let j = 0; j < size; j++) {
    const pivot = pivots[j];
    const value = x[pivot];
    x[pivot] = x[j];
    x[j] = value;
    if (value === 0) continue;
    const multipliers = lower[j];
    for (let k = 0; k < multipliers.length; k++) x[j + 1 + k] -= multipliers[k] * value;
  }
  for (let j = size - 1; j >= 0; j--) {
    const row = upper[j];
    let sum = x[j];
    for (let k = 1; k < row.length; k++) sum -= row[k] * x[j + k];
    x[j] = sum / row[0];
  }
  return x;
}
