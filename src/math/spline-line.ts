/**
 * What holds at an end of samples: `free` (the first two and the last two pieces are one polynomial
 * each: "not-a-knot", de Boor 1978, ch. IV), or a mirror in sample 0, where the function is even or
 * odd. Upper ends are always free.
 */
export type AxisEnds = 'periodic' | 'free' | 'even' | 'odd';

/** Fewest samples along an axis. */
export const fewestSamples = 4;

/**
 * A function that turns samples, in place, into cubic B-spline coefficients that interpolate them:
 * (c[i-1] + 4 c[i] + c[i+1])/6 = f[i]. `first` is the place of sample 0; the line also gets the
 * coefficients beyond its ends: one before and two behind a period, two on either side otherwise.
 * Throws RangeError for fewer than four samples.
 */
export function solveSplineLine(points: number, ends: AxisEnds): (line: Float64Array, first: number) => void {
  if (points < fewestSamples) throw new RangeError(`${points} samples are given along an axis; a spline needs ${fewestSamples}`);
  return ends === 'periodic' ? solvePeriodic(points) : solveBetween(points, ends);
}

/** Elimination in a tridiagonal system of rows (1, 4, 1): the factors by which upper neighbours count. */
function eliminationFactors(count: number, firstUpper: number): Float64Array {
  const factors = new Float64Array(count);
  factors[0] = firstUpper / 4;
  for (let k = 1; k < count; k++) factors[k] = 1 / (4 - factors[k - 1]);
  return factors;
}

function solveBetween(points: number, low: 'free' | 'even' | 'odd'): (line: Float64Array, first: number) => void {
  // Free ends leave c[1] = f[1] - (f[0] - 2 f[1] + f[2])/6 and the like above: unknown is what lies between.
  const from = low === 'free' ? 2 : 0;
  const count = points - 2 - from;
  const factors = eliminationFactors(Math.max(1, count), low === 'even' ? 2 : low === 'odd' ? 0 : 1);
  const sums = new Float64Array(points);
  const samples = new Float64Array(points);
  return (line, first) => {
    for (let k = 0; k < points; k++) samples[k] = line[first + k];
    const known = (k: number): number => samples[k] - (samples[k - 1] - 2 * samples[k] + samples[k + 1]) / 6;
    const c = (k: number): number => line[first + k];
    line[first + points - 2] = known(points - 2);
    if (low === 'free') line[first + 1] = known(1);
    for (let k = 0; k < count; k++) {
      const index = from + k;
      let right = 6 * samples[index];
      if (k === 0 && low === 'free') right -= c(1);
      if (k === count - 1) right -= (k === 0 && low === 'even' ? 2 : k === 0 && low === 'odd' ? 0 : 1) * c(points - 2);
      const pivot = k === 0 ? 4 : 4 - factors[k - 1];
      sums[k] = (right - (k === 0 ? 0 : sums[k - 1])) / pivot;
    }
    for (let k = count - 1; k >= 0; k--) line[first + from + k] = sums[k] - (k === count - 1 ? 0 : factors[k] * line[first + from + k + 1]);
    line[first + points - 1] = 6 * samples[points - 2] - 4 * c(points - 2) - c(points - 3);
    line[first + points] = 6 * samples[points - 1] - 4 * c(points - 1) - c(points - 2);
    line[first + points + 1] = 4 * c(points) - 6 * c(points - 1) + 4 * c(points - 2) - c(points - 3);
    if (low === 'free') {
      line[first] = 6 * samples[1] - 4 * c(1) - c(2);
      line[first - 1] = 6 * samples[0] - 4 * c(0) - c(1);
      line[first - 2] = 4 * c(-1) - 6 * c(0) + 4 * c(1) - c(2);
    } else {
      const sign = low === 'even' ? 1 : -1;
      line[first - 1] = sign * c(1);
      line[first - 2] = sign * c(2);
    }
  };
}

/** Cyclic system by Sherman & Morrison 1950: corners as a rank-one change. */
function solvePeriodic(points: number): (line: Float64Array, first: number) => void {
  // With gamma = -4 the first diagonal becomes 8 and the last 4 + 1/4.
  const gamma = -4;
  const diagonal = (k: number): number => (k === 0 ? 4 - gamma : k === points - 1 ? 4 - 1 / gamma : 4);
  const factors = new Float64Array(points);
  for (let k = 0; k < points; k++) factors[k] = 1 / (diagonal(k) - (k === 0 ? 0 : factors[k - 1]));
  const solve = (right: Float64Array): void => {
    for (let k = 0; k < points; k++) right[k] = (right[k] - (k === 0 ? 0 : right[k - 1])) * factors[k];
    for (let k = points - 2; k >= 0; k--) right[k] -= factors[k] * right[k + 1];
  };
  const correction = new Float64Array(points);
  correction[0] = gamma;
  correction[points - 1] = 1;
  solve(correction);
  const denominator = 1 + correction[0] + correction[points - 1] / gamma;
  const right = new Float64Array(points);
  return (line, first) => {
    for (let k = 0; k < points; k++) right[k] = 6 * line[first + k];
    solve(right);
    const share = (right[0] + right[points - 1] / gamma) / denominator;
    for (let k = 0; k < points; k++) line[first + k] = right[k] - share * correction[k];
    line[first - 1] = line[first + points - 1];
    line[first + points] = line[first];
    line[first + points + 1] = line[first + 1];
  };
}
