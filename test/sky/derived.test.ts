import { expect, test } from 'vitest';
import { randomStream } from '../../src/math/random.ts';
import {
  angleError,
  debiasedIntensity,
  depolarization,
  fractionError,
  inDegrees,
  polarizationAngle,
  polarizedFraction,
  polarizedIntensity,
} from '../../src/sky/derived.ts';
import { checkRow, type CheckId } from '../reference/check-rows.ts';
import { riceRows } from '../reference/sky.ts';
import { relativeError } from './compare.ts';

test('the bias of P is that of Rice 1945, and what debiasing leaves that of Wardle & Kronberg 1974', () => {
  const trials = 40_000;
  for (const [true_, id, debiased] of riceRows) {
    const [observed, leading] = checkRow(id);
    // To leading order the mean is sqrt(P0^2 + sigma^2): what debiasing takes back.
    expect(Math.abs(debiasedIntensity([2 * leading], 2)[0] - 2 * true_)).toBeLessThan(1e-7);
    const stream = randomStream(17, 'rice', Math.round(true_ * 10));
    const Q = Float64Array.from({ length: trials }, () => true_ * 2 + 2 * stream.gaussian());
    const U = Float64Array.from({ length: trials }, () => 2 * stream.gaussian());
    const P = polarizedIntensity(Q, U);
    for (const [values, expected] of [
      [P, observed],
      [debiasedIntensity(P, 2), debiased],
    ] as const) {
      const mean = values.reduce((a, b) => a + b, 0) / trials;
      const variance = values.reduce((sum, value) => sum + (value - mean) ** 2, 0) / trials;
      // Four errors of the mean of the trials; sigma is 2.
      expect(Math.abs(mean - 2 * expected) / Math.sqrt(variance / trials)).toBeLessThan(4);
    }
  }
});

test('debiased values are sqrt(P^2 - sigma^2), and 0 below sigma', () => {
  const rows: readonly (readonly [CheckId, number])[] = [['6.bias.3', 3], ['6.bias.5', 5], ['6.bias.8', 8]];
  for (const [id, observed] of rows) {
    expect(relativeError(debiasedIntensity([observed * 0.3], 0.3)[0], 0.3 * checkRow(id)[0])).toBeLessThan(1e-14);
  }
  expect([...debiasedIntensity([0.5, 1, NaN], 1)]).toEqual([0, 0, NaN]);
});

test('the angle of Q = 0.5, U = sin 60 deg is 30 deg north through east (IAU 1973)', () => {
  const chi = polarizationAngle([0.5, 0.5, -1, 0], [0.866025403784439, -0.866025403784439, 0, 0]);
  const degrees = inDegrees(chi);
  [30, -30, 90].forEach((expected, k) => expect(relativeError(degrees[k], expected)).toBeLessThan(1e-14));
  expect(degrees[3]).toBeNaN();
});

test('the error of the angle is sigma/(2P), as trials show at P/sigma = 5', () => {
  expect(relativeError(angleError([5], 1)[0], checkRow('6.sigchi')[0])).toBeLessThan(1e-14);
  const stream = randomStream(2, 'angle');
  const trials = 20_000;
  const chi = polarizationAngle(
    Float64Array.from({ length: trials }, () => 5 + stream.gaussian()),
    Float64Array.from({ length: trials }, stream.gaussian),
  );
  const rms = Math.sqrt(chi.reduce((sum, angle) => sum + angle * angle, 0) / trials);
  // First order in sigma/P: 2 % at P/sigma = 5; trials give 0.5 %.
  expect(relativeError(rms, 0.1)).toBeLessThan(0.04);
  expect([...angleError([0, 3], 0)]).toEqual([0, 0]);
  // Nothing known: uniform over pi has this spread.
  expect(angleError([0], 1)[0]).toBe(Math.PI / Math.sqrt(12));
});

test('fraction, its error, and depolarization', () => {
  expect([...polarizedFraction([1, 1, 1], [4, 0.5, 0], 0.5)]).toEqual([0.25, NaN, NaN]);
  // d(P/I)^2 = (dP/I)^2 + (P dI/I^2)^2 = (0.03)^2 + (0.04)^2 with P/I = 0.5, I = 2.
  expect(relativeError(fractionError([1], [2], 0.06, 0.16)[0], 0.05)).toBeLessThan(1e-14);
  expect(fractionError([1], [0], 0.06, 0.16)[0]).toBeNaN();
  // A pure nu^-0.9 spectrum is not depolarized.
  const [P1, P2] = [1.4e9 ** -0.9, 4.8e9 ** -0.9];
  expect(relativeError(depolarization([P1], [P2], 1.4e9, 4.8e9, 0.9)[0], 1)).toBeLessThan(1e-14);
  expect(relativeError(depolarization([P1 / 2], [P2], 1.4e9, 4.8e9, 0.9)[0], 0.5)).toBeLessThan(1e-14);
  expect(depolarization([P1], [0], 1.4e9, 4.8e9, 0.9)[0]).toBeNaN();
});
