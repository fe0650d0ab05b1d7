/** |actual - expected| / |expected|; NaN, which fails every bound, where either is. */
export function relativeError(actual: number, expected: number): number {
  return Math.abs(actual - expected) / Math.abs(expected);
}

/** The largest |actual - expected| over two lists; NaN where any entry is or the lengths differ. */
export function largestDifference(actual: ArrayLike<number>, expected: ArrayLike<number>): number {
  if (actual.length !== expected.length || actual.length === 0) return NaN;
  let worst = 0;
  for (let k = 0; k < expected.length; k++) {
    const difference = Math.abs(actual[k] - expected[k]);
    if (!(difference <= worst)) worst = difference;
    if (Number.isNaN(difference)) return NaN;
  }
  return worst;
}
