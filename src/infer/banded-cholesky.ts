/**
 * A symmetric banded matrix, its lower half: entry (i, j), j <= i, at [i * (band + 1) + j - i + band],
 * zero for i - j > band. After `factorBanded` the same places hold the Cholesky factor L.
 */
export interface BandedMatrix {
  readonly size: number;
  readonly band: number;
  readonly entries: Float64Array;
}

/** A zero matrix of the given size and half band width. */
export function bandedMatrix(size: number, band: number): BandedMatrix {
  return { size, band, entries: new Float64Array(size * (band + 1)) };
}

/** Replaces a positive definite banded matrix by its Cholesky factor, M = L L^T; throws where it is not. */
export function factorBanded(matrix: BandedMatrix): void {
  const { size, band, entries } = matrix;
  const width = band + 1;
  for (let i = 0; i < size; i++) {
    // Row i holds column j at rowI + j.
    const rowI = i * width - i + band;
    const first = Math.max(0, i - band);
    for (let j = first; j <= i; j++) {
      const rowJ = j * width - j + band;
      let sum = entries[rowI + j];
      for (let k = Math.max(first, j - band); k < j; k++) sum -= entries[rowI + k] * entries[rowJ + k];
      if (j < i) entries[rowI + j] = sum / entries[rowJ + j];
      else if (sum > 0) entries[rowI + i] = Math.sqrt(sum);
      else throw new Error(`The noise covariance is not positive definite (pivot ${i + 1} is ${sum}).`);
    }
  }
}

/** Solves L z = y for the factor L of `factorBanded`, in place of `y`. */
export function whitenBanded(factor: BandedMatrix, y: Float64Array): Float64Array {
  const { size, band, entries } = factor;
  for (let i = 0; i < size; i++) {
    const row = i * (band + 1) - i + band;
    let sum = y[i];
    for (let k = Math.max(0, i - band); k < i; k++) sum -= entries[row + k] * y[k];
    y[i] = sum / entries[row + i];
  }
  return y;
}

/** ln det L. */
export function logDeterminant(factor: BandedMatrix): number {
  let sum = 0;
  for (let i = 0; i < factor.size; i++) sum += Math.log(factor.entries[i * (factor.band + 1) + factor.band]);
  return sum;
}
