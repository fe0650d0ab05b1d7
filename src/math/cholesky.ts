/**
 * Lower triangle L of a symmetric positive definite matrix, both [row * n + column]: L L^T = matrix.
 * Undefined where the matrix is not positive definite.
 */
export function factorCholesky(matrix: ArrayLike<number>, n: number): Float64Array | undefined {
  const lower = new Float64Array(n * n);
  for (let row = 0; row < n; row++) {
    for (let column = 0; column <= row; column++) {
      let sum = matrix[row * n + column];
      for (let k = 0; k < column; k++) sum -= lower[row * n + k] * lower[column * n + k];
      if (row !== column) lower[row * n + column] = sum / lower[column * n + column];
      else if (sum > 0) lower[row * n + row] = Math.sqrt(sum);
      else return undefined;
    }
  }
  return lower;
}

/** y of L y = x, for a lower triangle [row * n + column]. */
export function solveLower(lower: ArrayLike<number>, x: ArrayLike<number>): Float64Array {
  const n = x.length;
  const y = new Float64Array(n);
  for (let row = 0; row < n; row++) {
    let sum = x[row];
    for (let k = 0; k < row; k++) sum -= lower[row * n + k] * y[k];
    y[row] = sum / lower[row * n + row];
  }
  return y;
}

/** y of L^T y = x. */
export function solveUpper(lower: ArrayLike<number>, x: ArrayLike<number>): Float64Array {
  const n = x.length;
  const y = new Float64Array(n);
  for (let row = n - 1; row >= 0; row--) {
    let sum = x[row];
    for (let k = row + 1; k < n; k++) sum -= lower[k * n + row] * y[k];
    y[row] = sum / lower[row * n + row];
  }
  return y;
}

/** L y. */
export function multiplyLower(lower: ArrayLike<number>, y: ArrayLike<number>): Float64Array {
  const n = y.length;
  return Float64Array.from({ length: n }, (_, row) => {
    let sum = 0;
    for (let k = 0; k <= row; k++) sum += lower[row * n + k] * y[k];
    return sum;
  });
}

/** ln det of L L^T. */
export function logDeterminantOf(lower: ArrayLike<number>, n: number): number {
  let sum = 0;
  for (let k = 0; k < n; k++) sum += 2 * Math.log(lower[k * n + k]);
  return sum;
}

/** Inverse of L L^T, [row * n + column]. */
export function inverseOf(lower: ArrayLike<number>, n: number): Float64Array {
  const inverse = new Float64Array(n * n);
  for (let column = 0; column < n; column++) {
    const unit = new Float64Array(n);
    unit[column] = 1;
    const solved = solveUpper(lower, solveLower(lower, unit));
    for (let row = 0; row < n; row++) inverse[row * n + column] = solved[row];
  }
  return inverse;
}
