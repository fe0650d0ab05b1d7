import { describe, expect, it } from 'vitest';
import { runNested } from '../../src/infer/nested.ts';
import { correlatedGaussian, curvedRidge, eggBox, gaussianBox, gaussianShells } from './known-posteriors.ts';
import { momentPulls, walkersOn } from './walker-pulls.ts';

const seeds = Array.from({ length: 30 }, (_, k) => 100 + k);

describe('samplers over 30 seeds', () => {
  it.each([gaussianBox(2), gaussianBox(5), gaussianBox(10), gaussianShells(2), gaussianShells(5), gaussianShells(10), eggBox])(
    'nested sampling: $name within 4 sigma of its own error, without bias',
    async (problem) => {
      const pulls: number[] = [];
      for (const seed of seeds) {
        const { logEvidence, error } = await runNested({ ...problem, seed, livePoints: 200 });
        pulls.push((logEvidence - problem.logEvidence) / error);
      }
      const mean = pulls.reduce((a, b) => a + b, 0) / pulls.length;
      console.log(`${problem.name}: mean pull ${mean.toFixed(2)}, largest ${Math.max(...pulls.map(Math.abs)).toFixed(2)}`);
      for (const pull of pulls) expect(Math.abs(pull)).toBeLessThan(4);
      // The mean of 30 unit Gaussians: 4 sigma.
      expect(Math.abs(mean)).toBeLessThan(4 / Math.sqrt(30));
    },
    1_800_000,
  );

  it('walkers: moments of a correlated Gaussian within 4 sigma of their own errors', async () => {
    for (const seed of seeds) {
      for (const pull of momentPulls(await walkersOn(correlatedGaussian, seed, 3000), correlatedGaussian)) expect(Math.abs(pull)).toBeLessThan(4);
    }
  }, 1_800_000);

  it('walkers: mean along a curved ridge; a chain of a few autocorrelation times is refused', async () => {
    for (const seed of seeds) {
      const result = await walkersOn(curvedRidge, seed, 10000);
      // Its autocorrelation time is about 1000 steps (so it is in the outside sampler emcee 3.1.4).
      expect(result.believable).toBe(false);
      expect(Math.abs(momentPulls(result, curvedRidge)[0])).toBeLessThan(4);
    }
  }, 1_800_000);
});
