import { expect, it } from 'vitest';
import type { LogDensities } from '../../src/infer/log-density.ts';
import { equalWeights } from '../../src/infer/evidence.ts';
import { runNested } from '../../src/infer/nested.ts';
import { runWalkers } from '../../src/infer/walkers.ts';
import { randomStream } from '../../src/math/random.ts';
import { needPython, pythonJson } from '../support/tools.ts';

/** An external dispersion screen p0 e^{2i(chi0 + RM l2)} e^{-2 s^2 l2^2} (Burn 1966) seen in 12 channels, noise 0.02. */
const lambda2 = Array.from({ length: 12 }, (_, k) => 0.01 + 0.005 * k);
const truth = [0.5, 0.3, 40, 8];
const noise = 0.02;
const model = ([p0, chi0, rm, s]: Iterable<number>): number[] =>
  lambda2.flatMap((l2) => {
    const p = p0 * Math.exp(-2 * s * s * l2 * l2);
    return [p * Math.cos(2 * (chi0 + rm * l2)), p * Math.sin(2 * (chi0 + rm * l2))];
  });
const random = randomStream(4, 'channels');
const data = model(truth).map((value) => value + noise * random.gaussian());
const low = [0, -1.5, -100, 0];
const high = [1, 1.5, 100, 20];

const density: LogDensities = async (points) =>
  points.map((x) => {
    if (x.some((value, j) => value < low[j] || value > high[j])) return -Infinity;
    return model(x).reduce((sum, value, k) => sum - ((value - data[k]) / noise) ** 2 / 2, 0);
  });

const python = `
import json, sys, numpy as np, emcee
q = json.loads(sys.stdin.read()); l2 = np.array(q['lambda2']); d = np.array(q['data']); lo = np.array(q['low']); hi = np.array(q['high'])
def lp(x):
    p = x[:, 0:1] * np.exp(-2 * x[:, 3:4]**2 * l2**2)
    a = 2 * (x[:, 1:2] + x[:, 2:3] * l2)
    m = np.stack([p * np.cos(a), p * np.sin(a)], -1).reshape(len(x), -1)
    l = -0.5 * np.sum(((m - d) / q['noise'])**2, 1)
    return np.where(np.any((x < lo) | (x > hi), 1), -np.inf, l)
np.random.seed(1)
e = emcee.EnsembleSampler(32, 4, lp, vectorize=True)
e.run_mcmc(np.array(q['truth']) + np.random.randn(32, 4) * [0.01, 0.01, 0.1, 0.1], 6000)
c = e.get_chain(discard=1000)
print(json.dumps({'mean': list(c.mean((0, 1))), 'sigma': list(c.std((0, 1))), 'time': list(emcee.autocorr.integrated_time(c, quiet=True)), 'count': c.shape[0] * c.shape[1]}))`;

it('agrees with emcee 3.1.4 (Debian python3-emcee) on the law of P(lambda^2): walkers and nested sampling', async (context) => {
  needPython(context, 'emcee');
  const outside = pythonJson(python, [], JSON.stringify({ lambda2, data, low, high, noise, truth })) as Record<'mean' | 'sigma' | 'time', number[]> & { count: number };
  const start = Array.from({ length: 32 }, () => Float64Array.from(truth, (value, j) => value + [0.01, 0.01, 0.1, 0.1][j] * random.gaussian()));
  const ours = await runWalkers({ density, start, seed: 2, maxSteps: 5000, checkEvery: 500 });
  expect(ours.believable, ours.reason).toBe(true);
  const nested = await runNested({ likelihood: (points) => density(points.map((u) => u.map((value, j) => low[j] + value * (high[j] - low[j])))), parameters: 4, seed: 3, livePoints: 150 });
  const drawn = equalWeights(nested.points, nested.weights, Math.floor(nested.effectiveSamples), 1).map(({ point }) => point.map((value, j) => low[j] + value * (high[j] - low[j])));
  for (let j = 0; j < 4; j++) {
    const sigma = outside.sigma[j];
    const theirs = sigma * Math.sqrt(outside.time[j] / outside.count);
    for (const [samples, error] of [
      [ours.samples, sigma * Math.sqrt(ours.timesSteps[j] / ours.samples.length)],
      [drawn, sigma / Math.sqrt(drawn.length)],
    ] as const) {
      const mean = samples.reduce((sum, sample) => sum + sample[j], 0) / samples.length;
      const scatter = Math.sqrt(samples.reduce((sum, sample) => sum + (sample[j] - mean) ** 2, 0) / samples.length);
      expect(Math.abs(mean - outside.mean[j]) / Math.hypot(theirs, error)).toBeLessThan(4);
      // A scatter is known to 1/sqrt(2) of the relative error of a mean; twice that for tails longer than a Gaussian's.
      expect(Math.abs(scatter - sigma) / Math.hypot(theirs, error)).toBeLessThan(4 * Math.SQRT2);
    }
  }
});
