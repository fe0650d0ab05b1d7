/** Mean of points of equal length, each counted with its weight (default 1). */
export function meanOf(points: readonly ArrayLike<number>[], weights?: ArrayLike<number>): Float64Array {
  const mean = new Float64Array(points[0].length);
  let total = 0;
  points.forEach((point, k) => {
    const weight = weights ? weights[k] : 1;
    total += weight;
    for (let j = 0; j < mean.length; j++) mean[j] += weight * point[j];
  });
  return mean.map((sum) => sum / total);
}

/** Covariance [row * n + column] about the mean, divided by the total weight. */
export function covarianceOf(points: readonly ArrayLike<number>[], mean: ArrayLike<number>, weights?: ArrayLike<number>): Float64Array {
  const n = mean.length;
  const covariance = new Float64Array(n * n);
  let total = 0;
  points.forEach((point, k) => {
    const weight = weights ? weights[k] : 1;
    total += weight;
    for (let row = 0; row < n; row++) {
      const off = weight * (point[row] - mean[row]);
      for (let column = 0; column <= row; column++) covariance[row * n + column] += off * (point[column] - mean[column]);
    }
  });
  for (let row = 0; row < n; row++) {
    for (let column = 0; column <= row; column++) {
      covariance[row * n + column] /= total;
      covariance[column * n + row] = covariance[row * n + column];
    }
  }
  return covariance;
}

/** The value below which a share of the total weight lies, by linear interpolation between middles of weights. */
export function weightedQuantiles(values: ArrayLike<number>, shares: readonly number[], weights?: ArrayLike<number>): number[] {
  const order = Array.from({ length: values.length }, (_, k) => k).sort((a, b) => values[a] - values[b]);
  const weight = (k: number): number => (weights ? weights[k] : 1);
  const total = order.reduce((sum, k) => sum + weight(k), 0);
  let below = 0;
  const middles = order.map((k) => {
    const middle = (below + weight(k) / 2) / total;
    below += weight(k);
    return middle;
  });
  return shares.map((share) => {
    let high = middles.findIndex((middle) => middle >= share);
    if (high < 0) high = order.length - 1;
    if (high === 0) return values[order[0]];
    const width = middles[high] - middles[high - 1];
    const part = width > 0 ? Math.min(1, (share - middles[high - 1]) / width) : 1;
    return values[order[high - 1]] + part * (values[order[high]] - values[order[high - 1]]);
  });
}

/** ln of the sum of exponentials, without overflow; -Infinity of none. */
export function logSum(values: ArrayLike<number>): number {
  let largest = -Infinity;
  for (let k = 0; k < values.length; k++) largest = Math.max(largest, values[k]);
  if (!Number.isFinite(largest)) return largest;
  let sum = 0;
  for (let k = 0; k < values.length; k++) sum += Math.exp(values[k] - largest);
  return largest + Math.log(sum);
}
