import { expect, it } from 'vitest';
import type { Likelihood } from '../../src/infer/likelihood.ts';
import type { FreeParameter, Prior } from '../../src/infer/prior.ts';
import { sharesBelowTruth, uniformDistance } from './calibration-runs.ts';

const free = (prior: Prior): FreeParameter => ({ path: 'a', unit: '', shownUnit: '', prior, allowed: [-1e3, 1e3], start: 0.5 });
const lambda2 = Array.from({ length: 6 }, (_, k) => 0.01 + 0.006 * k);

it('truths fall uniformly into posteriors of a dispersed polarized spectrum: 20 simulated observations, 3 parameters', async () => {
  const parameters = [free({ kind: 'uniform', low: 0.2, high: 1 }), free({ kind: 'normal', mean: 0, sigma: 10 }), free({ kind: 'uniform', low: 0, high: 15 })];
  const base: Likelihood = { count: 12, residualCount: 12, places: [], logNormalisation: 0, residuals: ([model]) => model.map((value) => -value / 0.08) };
  const shares = await sharesBelowTruth(parameters, async ([p, rm, s]) => [
    Float64Array.from(lambda2.flatMap((l2) => {
      const seen = p * Math.exp(-2 * s * s * l2 * l2);
      return [seen * Math.cos(2 * rm * l2), seen * Math.sin(2 * rm * l2)];
    })),
  ], base, 20, 30);
  // Beyond 1.95 once in 1000 (Kolmogorov 1933).
  for (let j = 0; j < 3; j++) expect(uniformDistance(shares.map((share) => share[j]))).toBeLessThan(1.95);
});

it('would notice posteriors that are half as wide as they should be', () => {
  // Shares of truths at 2 sigma where 1 is thought: (1 + erf(2x/sqrt 2))/2 of Gaussian quantiles pile up at the ends.
  const shares = Array.from({ length: 100 }, (_, k) => ((k + 0.5) / 100 < 0.5 ? 0.1 : 0.9));
  expect(uniformDistance(shares)).toBeGreaterThan(1.95);
});
