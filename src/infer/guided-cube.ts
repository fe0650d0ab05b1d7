import { factorCholesky, inverseOf, logDeterminantOf, multiplyLower, solveLower } from '../math/cholesky.ts';
import { normalQuantile, normalShare } from '../math/normal-quantile.ts';
import type { Fit } from './fit.ts';
import { valuesFromCube } from './prior-cube.ts';
import { scaledBounds, scaledFromValue, slopeFromScaled, valueFromScaled } from './prior.ts';
import type { FreeParameter } from './prior.ts';

/** How points of a unit cube become values of the parameters, and what that adds to ln L. */
export interface Cube {
  /** Sides of the cube. */
  readonly sides: number;
  readonly values: (point: ArrayLike<number>) => Float64Array;
  /** ln of the prior over the density that the cube gives at these values; -Infinity outside the prior. */
  readonly logWeight: (values: Float64Array) => number;
}

/** The cube of the prior itself. */
export function priorCube(parameters: readonly FreeParameter[]): Cube {
  return { sides: parameters.length, values: (point) => valuesFromCube(parameters, point), logWeight: () => 0 };
}

/** The fit's errors are widened by this much: its peak may be no Gaussian. */
const widening = 2;
/** Share of points drawn from the prior, so that no other peak is missed. */
const priorShare = 0.5;
/** nat from prior to Gaussian; with less to gain the prior's own cube does as well. */
const leastGain = 5;

/**
 * A cube with one side more, whose points are drawn half from the prior and half from a Gaussian
 * around a least-squares fit; ln Z and posterior stay exactly what they are, since the likelihood is
 * multiplied by prior over mixture (Petrosyan & Handley 2022, stochastic superpositional mixing),
 * while a run no longer spends its evaluations on finding the peak. The prior's own cube where the
 * fit has no covariance, or tells little more than the prior.
 */
export function guidedCube(parameters: readonly FreeParameter[], fit: Pick<Fit, 'values' | 'covariance'>): Cube {
  const n = parameters.length;
  const plain = priorCube(parameters);
  const lower = fit.covariance && guideLower(parameters, fit.values, fit.covariance);
  if (!lower || informationGain(parameters, lower) < leastGain) return plain;
  const centre = scaledOf(parameters, fit.values);
  const logNorm = -logDeterminantOf(lower, n) / 2 - (n / 2) * Math.log(2 * Math.PI);
  return {
    sides: n + 1,
    values: (point) => {
      const rest = Array.from({ length: n }, (_, j) => point[j + 1]);
      if (point[0] < priorShare) return plain.values(rest);
      const shift = multiplyLower(lower, rest.map(normalQuantile));
      return Float64Array.from(parameters, (parameter, j) => valueFromScaled(parameter, centre[j] + shift[j]));
    },
    logWeight: (values) => {
      const scaled = scaledOf(parameters, values);
      const prior = logPriorNormalised(parameters, scaled);
      if (prior === -Infinity) return -Infinity;
      const z = solveLower(lower, scaled.map((value, j) => value - centre[j]));
      const guide = logNorm - z.reduce((sum, value) => sum + value * value, 0) / 2;
      return -Math.log(priorShare + (1 - priorShare) * Math.exp(guide - prior));
    },
  };
}

/** Entropy of the prior less that of the Gaussian, nat: ranges of width 1 have none. */
function informationGain(parameters: readonly FreeParameter[], lower: Float64Array): number {
  const n = parameters.length;
  const normal = parameters.filter(({ prior }) => prior.kind === 'normal').length;
  return ((normal - n) * Math.log(2 * Math.PI * Math.E) - logDeterminantOf(lower, n)) / 2;
}

/** Values on the scale of a fit. */
export function scaledOf(parameters: readonly FreeParameter[], values: ArrayLike<number>): Float64Array {
  return Float64Array.from(parameters, (parameter, j) => scaledFromValue(parameter, values[j]));
}

/**
 * Lower triangle of a fit's covariance on the scale of the fit, no wider than the prior; undefined
 * where there is none. Parameters held by a bound get a tenth of the prior's width.
 */
export function scaledErrors(parameters: readonly FreeParameter[], values: ArrayLike<number>, covariance: ArrayLike<number>): Float64Array | undefined {
  const n = parameters.length;
  const scaled = scaledOf(parameters, values);
  const slopes = parameters.map((parameter, j) => slopeFromScaled(parameter, scaled[j]));
  const matrix = Float64Array.from({ length: n * n }, (_, k) => covariance[k] / (slopes[Math.floor(k / n)] * slopes[k % n]));
  if (!matrix.every(Number.isFinite)) return undefined;
  for (let j = 0; j < n; j++) if (!(matrix[j * n + j] > 0)) matrix[j * n + j] = 0.01;
  const factor = factorCholesky(matrix, n);
  if (!factor) return undefined;
  // Variance of a uniform range of width 1; a normal prior is in the fit already.
  const precision = inverseOf(factor, n);
  parameters.forEach(({ prior }, j) => (precision[j * n + j] += prior.kind === 'normal' ? 0 : 12));
  const narrowed = factorCholesky(precision, n);
  return narrowed && factorCholesky(inverseOf(narrowed, n), n);
}

function guideLower(parameters: readonly FreeParameter[], values: ArrayLike<number>, covariance: ArrayLike<number>): Float64Array | undefined {
  return scaledErrors(parameters, values, covariance)?.map((value) => value * widening);
}

/** ln of the prior's density on the scale of a fit, normalised within the bounds. */
export function logPriorNormalised(parameters: readonly FreeParameter[], scaled: ArrayLike<number>): number {
  let sum = 0;
  for (let j = 0; j < parameters.length; j++) {
    const [lower, upper] = scaledBounds(parameters[j]);
    if (!(scaled[j] >= lower && scaled[j] <= upper)) return -Infinity;
    if (parameters[j].prior.kind !== 'normal') sum -= Math.log(upper - lower);
    else sum -= scaled[j] ** 2 / 2 + Math.log(2 * Math.PI) / 2 + Math.log(normalShare(upper) - normalShare(lower));
  }
  return sum;
}
