import { describe, expect, it } from 'vitest';
import { gridSensitivity, SensitivityTally } from '../../src/math/sensitivity.ts';
import { sobolSequence } from '../../src/math/sobol.ts';

/** Ishigami & Homma 1990: sin x1 + 7 sin^2 x2 + 0.1 x3^4 sin x1 over (-pi, pi)^3. */
const ishigami = ([u, v, w]: ArrayLike<number> & Iterable<number>): number => {
  const [x, y, z] = [u, v, w].map((unit) => Math.PI * (2 * unit - 1));
  return Math.sin(x) + 7 * Math.sin(y) ** 2 + 0.1 * z ** 4 * Math.sin(x);
};
// Closed form with a = 7, b = 0.1: V = a^2/8 + b pi^4/5 + b^2 pi^8/18 + 1/2.
const [a, b] = [7, 0.1];
const variance = a ** 2 / 8 + (b * Math.PI ** 4) / 5 + (b ** 2 * Math.PI ** 8) / 18 + 1 / 2;
const first = [(1 + (b * Math.PI ** 4) / 5) ** 2 / 2 / variance, a ** 2 / 8 / variance, 0];
const joint = (8 * b ** 2 * Math.PI ** 8) / 225 / variance;
const total = [first[0] + joint, first[1], joint];

function tallied(samples: number, seed: number): SensitivityTally {
  const sequence = sobolSequence(6, seed);
  const tally = new SensitivityTally(3, samples);
  for (let n = 0; n < samples; n++) {
    const point = sequence.point(n);
    const [A, B] = [point.slice(0, 3), point.slice(3)];
    const mixed = [0, 1, 2].map((i) => A.map((value, k) => (k === i ? B[k] : value)));
    tally.add([A, B, ...mixed].map(ishigami));
  }
  return tally;
}

describe('Sobol indices', () => {
  it('are those of the Ishigami function, within their own errors', () => {
    for (const seed of [1, 2, 3]) {
      tallied(4096, seed).indices().forEach((index, i) => {
        expect(index.firstError).toBeLessThan(0.05);
        expect(index.firstError).toBeGreaterThan(0);
        expect(Math.abs(index.first - first[i])).toBeLessThan(4 * index.firstError);
        expect(Math.abs(index.total - total[i])).toBeLessThan(4 * index.totalError);
        // Sobol points converge faster than the jackknife promises: 1 % at 4096 samples.
        expect(Math.abs(index.first - first[i])).toBeLessThan(0.01);
        expect(Math.abs(index.total - total[i])).toBeLessThan(0.01);
      });
    }
  });

  it('do not change with an offset of the outcome', () => {
    const [plain, raised] = [new SensitivityTally(1, 64), new SensitivityTally(1, 64)];
    const sequence = sobolSequence(2, 5);
    for (let n = 0; n < 64; n++) {
      const [A, B] = sequence.point(n);
      plain.add([A, B, B]);
      raised.add([A + 1e6, B + 1e6, B + 1e6]);
    }
    // 1e6 costs six of sixteen digits, its square more.
    expect(Math.abs(raised.indices()[0].first - plain.indices()[0].first)).toBeLessThan(1e-6);
  });

  it('leave out samples with a blank and are unknown where nothing varies', () => {
    const tally = new SensitivityTally(1, 3);
    for (const outcome of [[1, 1, 1], [NaN, 1, 1], [1, 1, 1]]) tally.add(outcome);
    expect(tally.used).toBe(2);
    expect(tally.indices()[0].first).toBe(NaN);
  });

  it('of a grid are the analysis of variance: x + 2 y + 3 x y at levels -1, 1', () => {
    // Variances of the terms 1, 4, 9 (closed form of the two-level factorial).
    const values = [-1, 1].flatMap((x) => [-1, 1].map((y) => x + 2 * y + 3 * x * y));
    const [x, y] = gridSensitivity(values, [2, 2]);
    const relative = 1e-12;
    expect(Math.abs(x.first - 1 / 14)).toBeLessThan(relative);
    expect(Math.abs(x.total - 10 / 14)).toBeLessThan(relative);
    expect(Math.abs(y.first - 4 / 14)).toBeLessThan(relative);
    expect(Math.abs(y.total - 13 / 14)).toBeLessThan(relative);
  });

  it('of a fine grid approach the Ishigami function’s', () => {
    const steps = 24;
    const at = (k: number): number => (k + 0.5) / steps;
    const values: number[] = [];
    for (let i = 0; i < steps; i++) for (let j = 0; j < steps; j++) for (let k = 0; k < steps; k++) values.push(ishigami([at(i), at(j), at(k)]));
    // The midpoint rule of x^8 over 24 steps is good to about 1 %.
    gridSensitivity(values, [steps, steps, steps]).forEach((index, i) => {
      expect(Math.abs(index.first - first[i])).toBeLessThan(0.01);
      expect(Math.abs(index.total - total[i])).toBeLessThan(0.01);
    });
  });
});
