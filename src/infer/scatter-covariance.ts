import { factorCholesky, logDeterminantOf, solveLower } from '../math/cholesky.ts';
import { covarianceOf, meanOf } from '../math/moments.ts';
import { logGamma } from '../math/special.ts';

/** Mean and covariance of a model's own scatter, from realisations that differ by their seed only. */
export interface Scatter {
  readonly mean: Float64Array;
  /** Shrunk sample covariance [row * n + column]. */
  readonly covariance: Float64Array;
  /** Share of the target in it, 0 to 1. */
  readonly shrinkage: number;
  readonly realisations: number;
}

/**
 * Mean and covariance of vectors of equal length, the covariance shrunk towards mu times the unit
 * matrix by the share that is optimal in the Frobenius norm (Ledoit & Wolf 2004, section 3.3), so
 * that it can be inverted also where there are fewer realisations than numbers. Sums are divided by
 * the count, as there. Throws for fewer than two realisations.
 */
export function shrunkScatter(realisations: readonly ArrayLike<number>[]): Scatter {
  const count = realisations.length;
  if (count < 2) throw new Error(`A scatter needs at least two realisations; there ${count === 1 ? 'is one' : 'are none'}.`);
  const mean = meanOf(realisations);
  const n = mean.length;
  const sample = covarianceOf(realisations, mean);
  let mu = 0;
  for (let k = 0; k < n; k++) mu += sample[k * n + k] / n;
  // d^2 = |S - mu I|^2 and b^2 = mean |x x^T - S|^2 / count, norms divided by n.
  let d2 = 0;
  sample.forEach((value, k) => (d2 += (value - (k % (n + 1) === 0 ? mu : 0)) ** 2 / n));
  let b2 = 0;
  for (const one of realisations) {
    const off = mean.map((value, j) => one[j] - value);
    for (let row = 0; row < n; row++) {
      for (let column = 0; column < n; column++) b2 += (off[row] * off[column] - sample[row * n + column]) ** 2 / (n * count * count);
    }
  }
  const shrinkage = d2 > 0 ? Math.min(1, b2 / d2) : 1;
  const covariance = sample.map((value, k) => (1 - shrinkage) * value + (k % (n + 1) === 0 ? shrinkage * mu : 0));
  return { mean, covariance, shrinkage, realisations: count };
}

/**
 * ln of the Gaussian density of data about a mean, for a covariance that is known: that of noise, or
 * the sum of noise and a shrunk scatter. Throws where the covariance is not positive definite.
 */
export function logGaussian(data: ArrayLike<number>, mean: ArrayLike<number>, covariance: ArrayLike<number>): number {
  const { chi2, logDeterminant, n } = distance(data, mean, covariance);
  return -(chi2 + logDeterminant + n * Math.log(2 * Math.PI)) / 2;
}

/**
 * ln of the density of data about a mean where the covariance is an unbiased estimate from `realisations`
 * Gaussian draws, marginalised over the true one: a multivariate t distribution (Sellentin & Heavens
 * 2016, eq. 12 and 13). Its tails keep one unlucky realisation from deciding; regions of parameters
 * still come out too small unless there are several times more realisations than numbers (68 per cent
 * ones hold 47 with 10 realisations of 6 numbers, 66 with 40). Throws where there are no more
 * realisations than numbers.
 */
export function logMarginalised(data: ArrayLike<number>, mean: ArrayLike<number>, covariance: ArrayLike<number>, realisations: number): number {
  const n = data.length;
  if (realisations <= n) throw new Error(`${realisations} realisations are given for ${n} numbers; ${n + 1} or more are needed.`);
  const { chi2, logDeterminant } = distance(data, mean, covariance);
  const degrees = realisations - 1;
  const norm = logGamma(realisations / 2) - logGamma((realisations - n) / 2) - (n / 2) * Math.log(Math.PI * degrees);
  return norm - logDeterminant / 2 - (realisations / 2) * Math.log1p(chi2 / degrees);
}

/** The unbiased sample covariance, as `logMarginalised` takes it. */
export function sampleCovariance(realisations: readonly ArrayLike<number>[]): Float64Array {
  const factor = realisations.length / (realisations.length - 1);
  return covarianceOf(realisations, meanOf(realisations)).map((value) => value * factor);
}

function distance(data: ArrayLike<number>, mean: ArrayLike<number>, covariance: ArrayLike<number>): { chi2: number; logDeterminant: number; n: number } {
  const n = data.length;
  const lower = factorCholesky(covariance, n);
  if (!lower) throw new Error('The covariance is not positive definite: too few realisations, or numbers that follow from one another.');
  const z = solveLower(lower, Float64Array.from(data, (value, j) => value - mean[j]));
  return { chi2: z.reduce((sum, value) => sum + value * value, 0), logDeterminant: logDeterminantOf(lower, n), n };
}
