import { describe, expect, it } from 'vitest';
import { compareEvidences, evidenceVerdict } from '../../src/infer/evidence-verdict.ts';
import { fitModel } from '../../src/infer/fit.ts';
import type { Fit } from '../../src/infer/fit.ts';
import type { ForwardModel } from '../../src/infer/forward.ts';
import { guidedCube, priorCube } from '../../src/infer/guided-cube.ts';
import type { Likelihood } from '../../src/infer/likelihood.ts';
import { drawPosterior, samplePosterior, summarisePosterior } from '../../src/infer/posterior.ts';
import type { Posterior, SamplingState } from '../../src/infer/posterior.ts';
import type { FreeParameter, Prior } from '../../src/infer/prior.ts';
import { runNested } from '../../src/infer/nested.ts';
import { meanOf } from '../../src/math/moments.ts';

// checks.md 13.lin: y at x = 0..5, sigma 0.2, prior N(0, 5^2) on each coefficient.
const y = [0.1, 0.9, 2.2, 2.8, 4.1, 5.2];
const sigma = 0.2;
const knownLogEvidence = [-229.289408, -6.24300621, -10.932853];

const likelihood: Likelihood = {
  count: 6, residualCount: 6, places: [], logNormalisation: -6 * Math.log(sigma * Math.sqrt(2 * Math.PI)),
  residuals: ([model]) => model.map((value, k) => (y[k] - value) / sigma),
};
const polynomial: ForwardModel = async (c) => [Float64Array.from(y, (_, x) => c.reduce((sum, value, k) => sum + value * x ** k, 0))];
const coefficient = (prior: Prior): FreeParameter => ({ path: 'c', unit: '', shownUnit: '', prior, allowed: [-1e3, 1e3], start: 0.5 });
const normal = coefficient({ kind: 'normal', mean: 0, sigma: 5 });

async function fitted(parameters: readonly FreeParameter[]): Promise<Fit> {
  return fitModel({ parameters, forward: polynomial, likelihood, seed: 1, starts: 0, descents: 1 });
}

async function sampled(parameters: readonly FreeParameter[], method: 'nested' | 'walkers', seed: number, resume?: SamplingState, states: string[] = []): Promise<Posterior> {
  return samplePosterior({
    method, parameters, forward: polynomial, likelihood, fit: await fitted(parameters), seed, resume,
    effort: { livePoints: 150, maxSteps: 3000 }, onCheckpoint: (state) => states.push(JSON.stringify(state)),
  });
}

describe('samplePosterior', () => {
  it.each([0, 1, 2])('has the known evidence of a polynomial of degree %i (checks.md 13.lin)', async (degree) => {
    const posterior = await sampled(Array.from({ length: degree + 1 }, () => normal), 'nested', 4);
    const { value, error } = posterior.logEvidence!;
    expect(posterior.believable).toBe(true);
    expect(Math.abs(value - knownLogEvidence[degree]) / error).toBeLessThan(4);
    // Half a Gaussian twice too wide in each side: a few nat at most, where the prior alone needs 4 a coefficient.
    expect(error).toBeLessThan(0.2);
  });

  it.each(['nested', 'walkers'] as const)('%s: mean and errors of the line are those of least squares', async (method) => {
    const posterior = await sampled([normal, normal], method, 5);
    expect(posterior.believable, posterior.reason).toBe(true);
    const fit = await fitted([normal, normal]);
    summarisePosterior(posterior).forEach(({ mean, sigma: scatter, quantiles }, j) => {
      expect(Math.abs(mean - fit.values[j]) / fit.errors[j]).toBeLessThan(4 / Math.sqrt(posterior.effectiveSamples));
      expect(Math.abs(scatter / fit.errors[j] - 1)).toBeLessThan(4 / Math.sqrt(2 * posterior.effectiveSamples));
      expect(quantiles).toEqual([...quantiles].sort((a, b) => a - b));
    });
    const drawn = drawPosterior(posterior, 400, 1);
    expect(Math.abs(meanOf(drawn)[0] - fit.values[0]) / fit.errors[0]).toBeLessThan(0.3);
    // ln L of every sample is that of its values, whatever the cube made of it.
    const best = posterior.logLikelihoods.indexOf(Math.max(...posterior.logLikelihoods));
    const [model] = await polynomial(posterior.samples[best]);
    const chi2 = likelihood.residuals([model]).reduce((sum, r) => sum + r * r, 0);
    expect(Math.abs(posterior.logLikelihoods[best] - (likelihood.logNormalisation - chi2 / 2))).toBeLessThan(1e-9);
  });

  it.each(['nested', 'walkers'] as const)('%s: goes on from a checkpoint bit for bit', async (method) => {
    const states: string[] = [];
    const whole = await sampled([normal, normal], method, 6, undefined, states);
    const middle = JSON.parse(states[Math.floor(states.length / 2)]) as SamplingState;
    expect(await sampled([normal, normal], method, 6, middle)).toEqual(whole);
  });

  it('has the likelihood as evidence where nothing is free', async () => {
    const { logEvidence } = await samplePosterior({
      method: 'nested', parameters: [], forward: async () => [new Float64Array(6)], likelihood, fit: { values: new Float64Array(0) }, seed: 1, effort: { maxSteps: 1 },
    });
    const chi2 = y.reduce((sum, value) => sum + (value / sigma) ** 2, 0);
    expect(Math.abs(logEvidence!.value - (likelihood.logNormalisation - chi2 / 2))).toBeLessThan(1e-9);
  });
});

describe('guidedCube', () => {
  it('leaves ln Z as it is, also where the fit is on the wrong peak', async () => {
    // Two peaks of sigma 0.01 in [0, 1], the one that the fit knows has a tenth of the evidence: ln Z = ln 1.1.
    const uniform = coefficient({ kind: 'uniform', low: 0, high: 1 });
    const peak = (x: number, at: number): number => Math.exp(-(((x - at) / 0.01) ** 2) / 2) / (0.01 * Math.sqrt(2 * Math.PI));
    const lnL = (x: number): number => Math.log(0.1 * peak(x, 0.2) + peak(x, 0.8) + 1e-300);
    const fit = { values: Float64Array.of(0.2), covariance: Float64Array.of(1e-4) };
    for (const cube of [priorCube([uniform]), guidedCube([uniform], fit)]) {
      const { logEvidence, error } = await runNested({
        parameters: cube.sides, seed: 2, livePoints: 100,
        likelihood: async (points) => points.map((point) => {
          const values = cube.values(point);
          const weight = cube.logWeight(values);
          return weight === -Infinity ? weight : weight + lnL(values[0]);
        }),
      });
      expect(Math.abs(logEvidence - Math.log(1.1)) / error).toBeLessThan(4);
    }
  });
});

describe('evidence in words', () => {
  const judged = (name: string, logEvidence: number, error = 0.1) => ({ name, logEvidence, error });

  it('keeps the scale of Kass & Raftery 1995 (checks.md 13.scales) and says when the data cannot tell', () => {
    const sentence = (delta: number, error = 0.1): string => compareEvidences([judged('a', delta, error), judged('b', 0, error)])[0].sentence;
    expect(sentence(0.9)).toBe('The data cannot tell "a" from "b" (Δ ln Z = 0.9 ± 0.1).');
    expect(sentence(2)).toMatch(/prefer "a" over "b": positive/);
    expect(sentence(4)).toMatch(/: strong/);
    expect(sentence(6)).toMatch(/: very strong/);
    // Large, but not against its own error.
    expect(sentence(4, 2)).toMatch(/cannot tell/);
  });

  it('has one sentence a pair, and one for all', () => {
    const all = [judged('a', 0), judged('b', -0.5), judged('c', -9)];
    expect(compareEvidences(all).length).toBe(3);
    expect(evidenceVerdict(all)).toMatch(/^The data cannot tell "a" and "b" apart \(.*\)\. The data prefer "a" over "c": very strong/);
    expect(evidenceVerdict([all[0], all[2]])).toMatch(/^The data prefer "a" over "c"/);
    expect(evidenceVerdict([all[0]])).toMatch(/Only "a"/);
  });
});
