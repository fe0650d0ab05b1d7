/** A straight line y = intercept + slope x with the covariance that the weights imply. */
export interface WeightedLine {
  readonly intercept: number;
  readonly slope: number;
  readonly interceptError: number;
  readonly slopeError: number;
  /** Weighted sum of squared residuals. */
  readonly chi2: number;
}

/**
 * Weighted least-squares line through (x, y); weights are 1/error^2. Centred on the weighted mean,
 * so that far-off x lose no digits. Slope and intercept are NaN where the x with weight coincide.
 * Source: Bevington 1969, ch. 6 (from memory).
 */
export function weightedLine(x: ArrayLike<number>, y: ArrayLike<number>, weights: ArrayLike<number>): WeightedLine {
  let total = 0;
  let meanX = 0;
  let meanY = 0;
  for (let k = 0; k < x.length; k++) {
    total += weights[k];
    meanX += weights[k] * x[k];
    meanY += weights[k] * y[k];
  }
  meanX /= total;
  meanY /= total;
  let spread = 0;
  let product = 0;
  for (let k = 0; k < x.length; k++) {
    spread += weights[k] * (x[k] - meanX) ** 2;
    product += weights[k] * (x[k] - meanX) * (y[k] - meanY);
  }
  const slope = product / spread;
  const intercept = meanY - slope * meanX;
  let chi2 = 0;
  for (let k = 0; k < x.length; k++) chi2 += weights[k] * (y[k] - intercept - slope * x[k]) ** 2;
  return {
    intercept,
    slope,
    interceptError: Math.sqrt(1 / total + meanX ** 2 / spread),
    slopeError: Math.sqrt(1 / spread),
    chi2,
  };
}

/** Mean and standard deviation (n - 1) of the numbers that are not NaN; NaN where there are too few. */
export function meanAndScatter(values: ArrayLike<number>): { mean: number; scatter: number; count: number } {
  let count = 0;
  let sum = 0;
  for (let k = 0; k < values.length; k++) {
    if (Number.isNaN(values[k])) continue;
    count++;
    sum += values[k];
  }
  const mean = count > 0 ? sum / count : NaN;
  let squares = 0;
  for (let k = 0; k < values.length; k++) {
    if (!Number.isNaN(values[k])) squares += (values[k] - mean) ** 2;
  }
  return { mean, scatter: count > 1 ? Math.sqrt(squares / (count - 1)) : NaN, count };
}
