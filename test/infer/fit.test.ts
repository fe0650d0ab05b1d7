import { describe, expect, it } from 'vitest';
import { correlations, fitModel } from '../../src/infer/fit.ts';
import type { FitRequest } from '../../src/infer/fit.ts';
import type { ForwardModel } from '../../src/infer/forward.ts';
import { makeLikelihood } from '../../src/infer/likelihood.ts';
import type { FreeParameter, Prior } from '../../src/infer/prior.ts';
import type { Beam } from '../../src/scene/types.ts';
import { randomStream } from '../../src/math/random.ts';
import { correlatedNoise } from './correlated-noise.ts';
import { testAxes, testData } from './grids.ts';

const shape: Beam = { majorArcsec: 16, minorArcsec: 12, angle: 0.4 };
const axes = testAxes(26, 24);
const area = axes.nx * axes.ny;

const free = (path: string, prior: Prior, start: number): FreeParameter => ({
  path, unit: '', shownUnit: '', prior, start, allowed: [-1000, 1000],
});

/** A Gaussian ring sector in Q and U: amplitude, width (pixels) and angle (rad) of polarization. */
const ring: ForwardModel = async (values) => {
  const [amplitude, width, chi] = values;
  const light = Float64Array.from({ length: area }, (_, p) => {
    const r = Math.hypot((p % axes.nx) - 12.5, Math.floor(p / axes.nx) - 11.5);
    return amplitude * Math.exp(-(((r - 8) / width) ** 2) / 2);
  });
  return [light.map((value) => value * Math.cos(2 * chi)), light.map((value) => value * Math.sin(2 * chi))];
};

const truth = Float64Array.of(12, 4, 0.5);
const parameters = [
  free('amplitude', { kind: 'logUniform', low: 1, high: 100 }, 5),
  free('width', { kind: 'uniform', low: 1, high: 12 }, 6),
  free('chi', { kind: 'uniform', low: -1.5, high: 1.5 }, 0),
];

async function requestFor(noise: readonly Float64Array[], changes: Partial<FitRequest> = {}): Promise<FitRequest> {
  const model = await ring(truth);
  const planes = model.map((map, k) => ({
    quantity: k === 0 ? ('Q' as const) : ('U' as const), values: map.map((value, p) => value + noise[k][p]), correlation: shape,
  }));
  const likelihood = makeLikelihood(testData(axes, planes));
  return { parameters, forward: ring, likelihood, seed: 1, starts: 4, descents: 1, ...changes };
}

describe('fitModel', () => {
  it('has errors that cover: pulls over 200 noise draws are unit Gaussians', async () => {
    const draws = 200;
    const noise = correlatedNoise(axes, shape, 4, 2 * draws);
    const pulls: number[][] = [[], [], []];
    const first = await requestFor(noise.slice(0, 2));
    const { residuals: compress } = first.likelihood;
    for (let k = 0; k < draws; k++) {
      // The likelihood is linear in the data: shifting the model by the noise is another draw.
      const shift = [0, 1].map((j) => noise[2 * k + j].map((value, p) => value - noise[j][p]));
      const likelihood = {
        ...first.likelihood,
        residuals: (planes: readonly Float64Array[]) => compress(planes.map((plane, j) => plane.map((value, p) => value - shift[j][p]))),
      };
      const fit = await fitModel({ ...first, likelihood, starts: 0 });
      truth.forEach((value, j) => pulls[j].push((fit.values[j] - value) / fit.errors[j]));
    }
    for (const pull of pulls) {
      const mean = pull.reduce((sum, value) => sum + value, 0) / draws;
      const width = Math.sqrt(pull.reduce((sum, value) => sum + (value - mean) ** 2, 0) / (draws - 1));
      // Standard errors: of the mean 0.07, of the width 0.05.
      expect(Math.abs(mean)).toBeLessThan(0.28);
      expect(Math.abs(width - 1)).toBeLessThan(0.1);
    }
  });

  it('counts chi2 apart from priors, and gives correlations', async () => {
    const noise = correlatedNoise(axes, shape, 8, 2);
    const fit = await fitModel(await requestFor(noise));
    const n = fit.residuals.length;
    expect(fit.converged).toBe(true);
    expect(fit.priorChi2).toBe(0);
    // Five standard deviations of chi2.
    expect(Math.abs(fit.chi2 - (n - 3))).toBeLessThan(5 * Math.sqrt(2 * n));
    const r = correlations(fit.covariance!);
    for (const k of [0, 4, 8]) expect(Math.abs(r[k] - 1)).toBeLessThan(1e-12);
    // Angle and brightness of a ring have nothing to do with each other.
    expect(Math.abs(r[2])).toBeLessThan(0.05);
    expect(Math.abs(r[1])).toBeGreaterThan(0.1);
  });

  it('combines a normal prior with the data as inverse variances', async () => {
    const noise = correlatedNoise(axes, shape, 8, 2);
    const without = await fitModel(await requestFor(noise));
    const mean = without.values[1] + 1.5 * without.errors[1];
    const prior: Prior = { kind: 'normal', mean, sigma: without.errors[1] };
    const fit = await fitModel(await requestFor(noise, { parameters: [parameters[0], free('width', prior, 6), parameters[2]] }));
    // Two equal variances: halfway between, error/sqrt 2, chi2 of the prior 0.75^2; the width's
    // likelihood is Gaussian to about its relative error, 2 %.
    expect(Math.abs(fit.values[1] - (without.values[1] + mean) / 2)).toBeLessThan(0.1 * without.errors[1]);
    expect(Math.abs(fit.errors[1] / without.errors[1] - Math.SQRT1_2)).toBeLessThan(0.05);
    expect(Math.abs(fit.priorChi2 - 0.5625)).toBeLessThan(0.12);
  });

  it('finds the best of several minima by its starts', async () => {
    const noise = correlatedNoise(axes, shape, 8, 2);
    // A model that wraps: from chi = -1.4 the nearest minimum within bounds is a poor one.
    const prior: Prior = { kind: 'uniform', low: -1.5, high: 1.5 };
    const trapped = [parameters[0], parameters[1], free('chi', prior, -1.4)];
    const alone = await fitModel(await requestFor(noise, { parameters: trapped, starts: 0 }));
    const spread = await fitModel(await requestFor(noise, { parameters: trapped, starts: 12, descents: 3 }));
    expect(alone.atBound[2]).toBe('lower');
    expect(alone.errors[2]).toBeNaN();
    expect(Math.abs(spread.values[2] - 0.5)).toBeLessThan(5 * spread.errors[2]);
    expect(spread.chi2).toBeLessThan(alone.chi2);
    expect(spread.descents).toHaveLength(3);
  });

  it('evaluates a hypothesis without free parameters', async () => {
    const request = await requestFor(correlatedNoise(axes, shape, 8, 2), { parameters: [], forward: () => ring(truth), starts: 0 });
    const fit = await fitModel(request);
    expect(fit.values).toHaveLength(0);
    expect(fit.converged).toBe(true);
    expect(fit.chi2 / fit.residuals.length).toBeGreaterThan(0.6);
    expect(fit.chi2 / fit.residuals.length).toBeLessThan(1.4);
  });

  it('gives the same numbers again, reports progress and stops when told', async () => {
    const noise = [0, 1].map((k) => {
      const random = randomStream(k, 'white');
      return Float64Array.from({ length: area }, () => random.gaussian());
    });
    const stages: string[] = [];
    const a = await fitModel(await requestFor(noise, { onProgress: ({ stage, step, steps }) => stages.push(`${stage} ${step}/${steps}`) }));
    const b = await fitModel(await requestFor(noise));
    expect(a).toEqual(b);
    expect(stages.slice(0, 6)).toEqual([1, 2, 3, 4, 5, 6].map((k) => `starts ${k}/6`));
    expect(stages[6]).toBe('descent 1/1');
    const stop = new AbortController();
    const reason = new Error('enough');
    const onProgress = (): void => stop.abort(reason);
    await expect(fitModel(await requestFor(noise, { signal: stop.signal, onProgress }))).rejects.toBe(reason);
  });
});
