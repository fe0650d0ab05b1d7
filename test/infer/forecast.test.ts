import { describe, expect, it } from 'vitest';
import { expectedEvidence } from '../../src/infer/forecast.ts';
import type { ForecastHypothesis } from '../../src/infer/forecast.ts';
import type { Likelihood } from '../../src/infer/likelihood.ts';
import type { FreeParameter } from '../../src/infer/prior.ts';
import { parseStudy } from '../../src/infer/study.ts';
import { factorCholesky, inverseOf, logDeterminantOf, solveLower } from '../../src/math/cholesky.ts';
import { randomStream } from '../../src/math/random.ts';

const x = Array.from({ length: 12 }, (_, k) => k / 11);
const sigma = 0.3;
const coefficient: FreeParameter = { path: 'c', unit: '', shownUnit: '', prior: { kind: 'normal', mean: 0, sigma: 5 }, allowed: [-1e3, 1e3], start: 0 };
const likelihood: Likelihood = { count: 12, residualCount: 12, places: [], logNormalisation: 0, residuals: ([model]) => model.map((value) => -value / sigma) };
const polynomial = (values: number[]): ForecastHypothesis => ({
  parameters: values.map(() => coefficient),
  values: Float64Array.from(values),
  forward: async (c) => [Float64Array.from(x, (at) => c.reduce((sum, value, k) => sum + value * at ** k, 0))],
});

/** ln Z of a polynomial in closed form: y is Gaussian with covariance sigma^2 I + 25 X X^T. */
function logEvidence(y: readonly number[], terms: number): number {
  const n = y.length;
  const covariance = Float64Array.from({ length: n * n }, (_, k) => {
    const [row, column] = [Math.floor(k / n), k % n];
    let sum = row === column ? sigma * sigma : 0;
    for (let power = 0; power < terms; power++) sum += 25 * x[row] ** power * x[column] ** power;
    return sum;
  });
  const lower = factorCholesky(covariance, n)!;
  const z = solveLower(lower, y);
  return -(z.reduce((sum, value) => sum + value * value, 0) + logDeterminantOf(lower, n) + n * Math.log(2 * Math.PI)) / 2;
}

describe('expectedEvidence', () => {
  it.each([[[1, 2], [1]], [[1, 0.1], [1]], [[2], [2, 0]]])('is the mean over simulated data of exact ln Bayes factors: truth %j', async (truth, other) => {
    const forecast = await expectedEvidence(polynomial(truth), polynomial(other), likelihood);
    const random = randomStream(3, 'noise');
    const draws = Array.from({ length: 2000 }, () => {
      const y = x.map((at) => truth.reduce((sum, value, k) => sum + value * at ** k, 0) + sigma * random.gaussian());
      return logEvidence(y, truth.length) - logEvidence(y, other.length);
    });
    const mean = draws.reduce((a, b) => a + b, 0) / draws.length;
    const scatter = Math.sqrt(draws.reduce((sum, value) => sum + (value - mean) ** 2, 0) / draws.length);
    // Mean of 2000 draws: 4 sigma; and priors of 5 against errors of 0.2 in the closed form of the noise's share.
    expect(Math.abs(forecast.deltaLogEvidence - mean)).toBeLessThan(4 * (scatter / Math.sqrt(2000)) + 0.02);
    // The scatter leaves out chi^2 of one degree of freedom, 0.7 in ln L.
    expect(Math.abs(Math.hypot(forecast.scatter, Math.SQRT1_2) / scatter - 1)).toBeLessThan(0.1);
  });

  it('has the errors of the Fisher matrix with the priors', async () => {
    const { errors } = await expectedEvidence(polynomial([1, 2]), polynomial([1]), likelihood);
    const fisher = Float64Array.from({ length: 4 }, (_, k) => x.reduce((sum, at) => sum + at ** (Math.floor(k / 2) + (k % 2)), 0) / sigma ** 2 + (k % 3 === 0 ? 1 / 25 : 0));
    const covariance = inverseOf(factorCholesky(fisher, 2)!, 2);
    // Finite differences of a linear model: rounding over the step.
    [0, 3].forEach((k, j) => expect(Math.abs(errors[j] / Math.sqrt(covariance[k]) - 1)).toBeLessThan(1e-6));
  });
});

describe('candidate bands of a study', () => {
  const study = (forecast: string): string => `gyrelight-study: 1
data: [{quantity: Q, file: q.fits, noise: 20 uJy/beam}]
hypotheses: [{name: one, scene: a.scene.yaml}]
forecast: ${forecast}
`;
  it('are lists, bands of channels and scans', () => {
    const { candidates } = parseStudy(study('{bands: [{name: S, from: 2 GHz, to: 4 GHz, channels: 2, noise: 10 uJy/beam, time: 4}, {at: [8 GHz], noise: 5 uJy/beam}], scan: {from: 1 GHz, to: 4 GHz, steps: 3, noise: 9 uJy/beam}}'), 'a');
    expect(candidates.map(({ name }) => name)).toEqual(['S', '8 GHz', '1 GHz', '2 GHz', '4 GHz']);
    expect(candidates[0].channels).toEqual([{ frequencyHz: 2.5e9, widthHz: 1e9 }, { frequencyHz: 3.5e9, widthHz: 1e9 }]);
    expect(candidates[0]).toMatchObject({ time: 4, noise: { text: '10 uJy/beam' } });
  });

  it('are refused where a band is no band', () => {
    expect(() => parseStudy(study('{bands: [{from: 4 GHz, to: 2 GHz, channels: 2, noise: 10 uJy/beam}]}'), 'a')).toThrow(/a band needs `at/);
    expect(() => parseStudy(study('{bands: [{at: [2 GHz]}]}'), 'a')).toThrow(/noise is missing/);
  });
});
