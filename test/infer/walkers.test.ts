import { describe, expect, it } from 'vitest';
import { autocorrelationTime } from '../../src/infer/autocorrelation.ts';
import { runWalkers } from '../../src/infer/walkers.ts';
import type { WalkerState } from '../../src/infer/walkers.ts';
import { differenceMove, stretchMove } from '../../src/infer/walker-moves.ts';
import { randomStream } from '../../src/math/random.ts';
import { correlatedGaussian, curvedRidge } from './known-posteriors.ts';
import { ridgeStart, momentPulls, walkersOn } from './walker-pulls.ts';

describe('runWalkers', () => {
  it.each([1, 2])('has the moments of a correlated Gaussian within 4 sigma of its own errors (seed %i)', async (seed) => {
    const result = await walkersOn(correlatedGaussian, seed, 3000);
    expect(result.believable, result.reason).toBe(true);
    for (const pull of momentPulls(result, correlatedGaussian)) expect(Math.abs(pull)).toBeLessThan(4);
  });

  it('refuses to be believed when too short, and says why', async () => {
    const result = await runWalkers({ density: curvedRidge.density, start: ridgeStart(1, 20), seed: 1, maxSteps: 200 });
    expect(result.believable).toBe(false);
    expect(result.reason).toMatch(/autocorrelation times long|drifting/);
  });

  it('goes on from a checkpoint bit for bit', async () => {
    const request = { density: correlatedGaussian.density, start: ridgeStart(5, 12), seed: 5, maxSteps: 400, checkEvery: 50 };
    const states: string[] = [];
    const whole = await runWalkers({ ...request, onCheckpoint: (state) => states.push(JSON.stringify(state)) });
    expect(states.length).toBe(8);
    for (const text of [states[0], states[4]]) {
      const resumed = await runWalkers({ ...request, start: [], resume: JSON.parse(text) as WalkerState });
      expect(resumed.samples).toEqual(whole.samples);
      expect(resumed.evaluations).toBe(whole.evaluations);
    }
  });

  it('throws for too few walkers, a start without density, and NaN', async () => {
    const density = correlatedGaussian.density;
    await expect(runWalkers({ density, start: ridgeStart(1, 3), seed: 1, maxSteps: 10 })).rejects.toThrow('4 are needed');
    const nowhere = async (points: readonly Float64Array[]): Promise<number[]> => points.map(() => -Infinity);
    await expect(runWalkers({ density: nowhere, start: ridgeStart(1, 8), seed: 1, maxSteps: 10 })).rejects.toThrow('density is 0');
    const broken = async (points: readonly Float64Array[]): Promise<number[]> => points.map(() => NaN);
    await expect(runWalkers({ density: broken, start: ridgeStart(1, 8), seed: 1, maxSteps: 10 })).rejects.toThrow('NaN');
  });

  it('stops with the reason of its signal', async () => {
    const signal = AbortSignal.abort(new Error('enough'));
    await expect(runWalkers({ density: correlatedGaussian.density, start: ridgeStart(1, 8), seed: 1, maxSteps: 10, signal })).rejects.toThrow('enough');
  });
});

describe('moves', () => {
  it.each([['stretch', stretchMove], ['difference', differenceMove]] as const)('%s commutes with affine maps (Goodman & Weare 2010)', (_, move) => {
    const others = [[1, 2], [-1, 0.5], [0.3, -2], [2, 2]];
    const map = ([x, y]: Iterable<number>): number[] => [3 * x - y + 5, 0.1 * x + 2 * y - 7];
    const plain = move(randomStream(1, 'move'), [0.2, 0.4], others);
    const mapped = move(randomStream(1, 'move'), map([0.2, 0.4]), others.map(map));
    // Rounding only.
    map(plain.point).forEach((value, j) => expect(Math.abs(mapped.point[j] - value)).toBeLessThan(1e-12));
    expect(mapped.logFactor).toBe(plain.logFactor);
  });
});

describe('autocorrelationTime', () => {
  it('is (1 + a)/(1 - a) for x_k = a x_(k-1) + noise (closed form)', () => {
    const a = 0.9;
    const series = Array.from({ length: 20 }, (_, walker) => {
      const random = randomStream(1, 'autoregression', walker);
      let x = random.gaussian() / Math.sqrt(1 - a * a);
      return Float64Array.from({ length: 4000 }, () => (x = a * x + random.gaussian()));
    });
    // Scatter of the estimate: tau sqrt(2 (2 * 5 + 1) tau / N) with N = 80000 (Sokal 1997), about 7 %; 3 sigma.
    expect(Math.abs(autocorrelationTime(series) / 19 - 1)).toBeLessThan(0.21);
  });

  it('is NaN where nothing varies', () => {
    expect(autocorrelationTime([new Float64Array(100)])).toBeNaN();
  });
});
