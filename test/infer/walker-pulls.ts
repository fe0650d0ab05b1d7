import { autocorrelationTime } from '../../src/infer/autocorrelation.ts';
import type { LogDensities } from '../../src/infer/log-density.ts';
import { runWalkers } from '../../src/infer/walkers.ts';
import type { WalkerResult } from '../../src/infer/walkers.ts';
import { randomStream } from '../../src/math/random.ts';

/** A two-parameter density with known moments. */
export interface KnownMoments {
  readonly density: LogDensities;
  readonly means: readonly number[];
  readonly variances: readonly number[];
  readonly covariance: number;
}

const walkers = 24;

export const ridgeStart = (seed: number, count: number): Float64Array[] => {
  const random = randomStream(seed, 'start');
  return Array.from({ length: count }, () => Float64Array.of(random.gaussian(), random.gaussian()));
};

export function walkersOn(problem: KnownMoments, seed: number, steps: number): Promise<WalkerResult> {
  // checkEvery = maxSteps: as long as it is told, however soon it could be believed.
  return runWalkers({ density: problem.density, start: ridgeStart(seed, walkers), seed, maxSteps: steps, checkEvery: steps });
}

/** (estimate - truth)/error of means, variances and covariance, each error from its own autocorrelation time. */
export function momentPulls({ samples }: WalkerResult, { means, variances, covariance }: KnownMoments): number[] {
  const [x, y] = means;
  const moments: [number, (sample: Float64Array) => number][] = [
    [means[0], ([a]) => a],
    [means[1], ([, b]) => b],
    [variances[0], ([a]) => (a - x) ** 2],
    [variances[1], ([, b]) => (b - y) ** 2],
    [covariance, ([a, b]) => (a - x) * (b - y)],
  ];
  return moments.map(([truth, of]) => {
    const values = samples.map(of);
    const series = Array.from({ length: walkers }, (_, w) => Float64Array.from(values.filter((__, k) => k % walkers === w)));
    const mean = values.reduce((a, b) => a + b, 0) / values.length;
    const scatter = values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / values.length;
    return (mean - truth) / Math.sqrt((scatter * autocorrelationTime(series)) / values.length);
  });
}
