/** A function of one variable. */
export interface SmoothCurve {
  value(x: number): number;
  /** First derivative; at the ends that of the piece within. */
  slope(x: number): number;
}

/**
 * The cubic spline through points at ascending x, twice continuously differentiable, without curvature at
 * its ends; beyond them it keeps the value there.
 */
export function naturalSpline(x: ArrayLike<number>, y: ArrayLike<number>): SmoothCurve {
  const n = x.length;
  const curvature = new Float64Array(n);
  const upper = new Float64Array(n);
  const right = new Float64Array(n);
  for (let k = 1; k < n - 1; k++) {
    const [before, after] = [x[k] - x[k - 1], x[k + 1] - x[k]];
    const pivot = 2 * (before + after) - before * upper[k - 1];
    upper[k] = after / pivot;
    right[k] = (6 * ((y[k + 1] - y[k]) / after - (y[k] - y[k - 1]) / before) - before * right[k - 1]) / pivot;
  }
  for (let k = n - 2; k > 0; k--) curvature[k] = right[k] - upper[k] * curvature[k + 1];
  const pieceOf = (at: number): { low: number; high: number; width: number; a: number; b: number } => {
    let [low, high] = [0, n - 1];
    while (high - low > 1) {
      const middle = (low + high) >> 1;
      if (x[middle] <= at) low = middle;
      else high = middle;
    }
    const width = x[high] - x[low];
    return { low, high, width, a: (x[high] - at) / width, b: (at - x[low]) / width };
  };
  return {
    value: (at) => {
      if (at <= x[0]) return y[0];
      if (at >= x[n - 1]) return y[n - 1];
      const { low, high, width, a, b } = pieceOf(at);
      return a * y[low] + b * y[high] + (((a * a * a - a) * curvature[low] + (b * b * b - b) * curvature[high]) * width * width) / 6;
    },
    slope: (at) => {
      if (at < x[0] || at > x[n - 1]) return 0;
      const { low, high, width, a, b } = pieceOf(at);
      return (y[high] - y[low]) / width + (((1 - 3 * a * a) * curvature[low] + (3 * b * b - 1) * curvature[high]) * width) / 6;
    },
  };
}
