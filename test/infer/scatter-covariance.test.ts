import { describe, expect, it } from 'vitest';
import { logGaussian, logMarginalised, sampleCovariance, shrunkScatter } from '../../src/infer/scatter-covariance.ts';
import { factorCholesky, inverseOf, multiplyLower } from '../../src/math/cholesky.ts';
import { randomStream } from '../../src/math/random.ts';
import { needPython, pythonJson } from '../support/tools.ts';

const n = 6;
const covariance = Float64Array.from({ length: n * n }, (_, k) => {
  const [row, column] = [Math.floor(k / n), k % n];
  return (1 + row) ** 0.5 * (1 + column) ** 0.5 * Math.exp(-Math.abs(row - column));
});
const lower = factorCholesky(covariance, n)!;
const draws = (count: number, index = 0): Float64Array[] => {
  const random = randomStream(1, 'realisations', index);
  return Array.from({ length: count }, () => multiplyLower(lower, Float64Array.from({ length: n }, () => random.gaussian())));
};
const distance2 = (a: Float64Array, b: Float64Array): number => a.reduce((sum, value, k) => sum + (value - b[k]) ** 2, 0);

describe('shrunkScatter', () => {
  it('has the shrinkage of the formula written out in numpy (Ledoit & Wolf 2004, section 3.3)', (context) => {
    needPython(context, 'numpy');
    const sample = draws(12);
    const code = `
import json, sys, numpy as np
x = np.array(json.loads(sys.stdin.read())); x = x - x.mean(0); t, n = x.shape
s = x.T @ x / t; m = np.trace(s) / n
norm = lambda a: np.sum(a * a) / n
d2 = norm(s - m * np.eye(n)); b2 = min(d2, sum(norm(np.outer(v, v) - s) for v in x) / t**2)
print(json.dumps([b2 / d2, *((b2 / d2) * m * np.eye(n) + (1 - b2 / d2) * s).ravel()]))`;
    const [shrinkage, ...theirs] = pythonJson(code, [], JSON.stringify(sample.map((one) => [...one]))) as number[];
    const ours = shrunkScatter(sample);
    expect(Math.abs(ours.shrinkage / shrinkage - 1)).toBeLessThan(1e-12);
    ours.covariance.forEach((value, k) => expect(Math.abs(value - theirs[k])).toBeLessThan(1e-12));
  });

  it('comes nearer to the truth than the sample covariance, and can be inverted with few realisations', () => {
    let gain = 0;
    for (let k = 0; k < 20; k++) {
      const few = draws(5, k);
      const shrunk = shrunkScatter(few);
      expect(factorCholesky(shrunk.covariance, n)).toBeDefined();
      gain += distance2(shrunk.covariance, covariance) < distance2(sampleCovariance(few), covariance) ? 1 : 0;
    }
    // At random 10 of 20 +- 2.2.
    expect(gain).toBeGreaterThan(18);
    expect(shrunkScatter(draws(4000)).shrinkage).toBeLessThan(0.01);
    expect(() => shrunkScatter(draws(1))).toThrow('at least two');
  });
});

describe('densities', () => {
  it('are those of scipy: multivariate normal and multivariate t', (context) => {
    needPython(context, 'scipy');
    const [data] = draws(1, 77);
    const mean = new Float64Array(n).fill(0.3);
    const code = `
import json, sys, numpy as np
from scipy import stats
d, m, c = [np.array(v) for v in json.loads(sys.stdin.read())]; n = len(d); c = c.reshape(n, n); N = 20
# Sellentin & Heavens 2016: t with nu = N - n degrees, shape S (N - 1)/(N - n).
print(json.dumps([stats.multivariate_normal.logpdf(d, m, c), stats.multivariate_t.logpdf(d, m, c * (N - 1) / (N - n), df=N - n)]))`;
    const [normal, marginalised] = pythonJson(code, [], JSON.stringify([data, mean, covariance].map((v) => [...v]))) as number[];
    expect(Math.abs(logGaussian(data, mean, covariance) - normal)).toBeLessThan(1e-10);
    expect(Math.abs(logMarginalised(data, mean, covariance, 20) - marginalised)).toBeLessThan(1e-10);
    expect(() => logMarginalised(data, mean, covariance, 6)).toThrow('7 or more are needed');
  });

  it('tend to the Gaussian as realisations grow', () => {
    const [data] = draws(1, 78);
    const mean = new Float64Array(n);
    // Difference of order chi2^2/N.
    expect(Math.abs(logMarginalised(data, mean, covariance, 1e6) - logGaussian(data, mean, covariance))).toBeLessThan(1e-3);
  });

  it.each([[10, 0.4665, 0.3145], [40, 0.662, 0.6225]])('cover a parameter as often as the same computed in numpy: %i realisations', (count, marginalisedShare, gaussianShare) => {
    // One number mu on a known pattern, flat prior, its central 68 per cent; numpy, 2000 trials each.
    const pattern = new Float64Array(n).fill(1);
    const grid = Array.from({ length: 81 }, (_, k) => -8 + k / 5);
    const covered = { marginalised: 0, gaussian: 0 };
    const trials = 300;
    for (let k = 0; k < trials; k++) {
      const [data, ...realisations] = draws(count + 1, 1000 + k);
      const sample = sampleCovariance(realisations);
      for (const kind of ['marginalised', 'gaussian'] as const) {
        const density = grid.map((mu) => {
          const mean = pattern.map((value) => value * mu);
          return Math.exp(kind === 'gaussian' ? logGaussian(data, mean, sample) : logMarginalised(data, mean, sample, count));
        });
        const total = density.reduce((a, b) => a + b, 0);
        const below = density.reduce((sum, value, j) => sum + (j < 40 ? value : j === 40 ? value / 2 : 0), 0) / total;
        if (below > 0.16 && below < 0.84) covered[kind]++;
      }
    }
    // Binomial scatter of 300 trials: 0.029; 4 of them.
    expect(Math.abs(covered.marginalised / trials - marginalisedShare)).toBeLessThan(0.115);
    expect(Math.abs(covered.gaussian / trials - gaussianShare)).toBeLessThan(0.115);
    expect(covered.marginalised).toBeGreaterThan(covered.gaussian);
  });

  it('refuse a covariance that cannot be inverted', () => {
    expect(() => logGaussian([1, 2], [0, 0], [1, 1, 1, 1])).toThrow('not positive definite');
    const inverse = inverseOf(lower, n);
    // Rounding.
    expect(Math.abs(inverse.reduce((sum, value, k) => sum + value * covariance[k], 0) - n)).toBeLessThan(1e-11);
  });
});
