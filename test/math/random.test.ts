import { expect, test } from 'vitest';
import { randomStream } from '../../src/math/random.ts';

const draw = (count: number, next: () => number): number[] => Array.from({ length: count }, next);

test('a stream is a function of seed, name and index alone', () => {
  const first = randomStream(7, 'noise', 3);
  const values = draw(5, () => first.uniform());
  const again = randomStream(7, 'noise', 3);
  expect(draw(5, () => again.uniform())).toEqual(values);
  for (const other of [randomStream(8, 'noise', 3), randomStream(7, 'points', 3), randomStream(7, 'noise', 4)]) {
    expect(other.uniform()).not.toBe(values[0]);
  }
  // A name and an index cannot run into each other.
  expect(randomStream(1, 'a/1', 0).uniform()).not.toBe(randomStream(1, 'a', 1).uniform());
});

test('uniform numbers lie in [0, 1) evenly', () => {
  const stream = randomStream(1, 'uniform');
  const count = 40_000;
  const bins = new Array<number>(20).fill(0);
  for (const value of draw(count, () => stream.uniform())) {
    expect(value >= 0 && value < 1).toBe(true);
    bins[Math.floor(20 * value)]++;
  }
  const chi2 = bins.reduce((sum, n) => sum + (n - count / 20) ** 2 / (count / 20), 0);
  // Mean 19, deviation √38: four deviations.
  expect(chi2).toBeLessThan(19 + 4 * Math.sqrt(38));
});

test('Gaussian numbers have mean 0, variance 1, kurtosis 3 and no memory', () => {
  const stream = randomStream(2, 'gaussian');
  const count = 40_000;
  const values = draw(count, () => stream.gaussian());
  const mean = (f: (value: number, k: number) => number): number => values.reduce((sum, value, k) => sum + f(value, k), 0) / count;
  // Four standard errors of each mean: √(1, 2, 96, 1)/√N.
  expect(Math.abs(mean((v) => v))).toBeLessThan(4 / Math.sqrt(count));
  expect(Math.abs(mean((v) => v * v) - 1)).toBeLessThan(4 * Math.sqrt(2 / count));
  expect(Math.abs(mean((v) => v ** 4) - 3)).toBeLessThan(4 * Math.sqrt(96 / count));
  expect(Math.abs(mean((v, k) => v * (values[k + 1] ?? 0)))).toBeLessThan(4 / Math.sqrt(count));
});
