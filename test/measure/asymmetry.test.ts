import { expect, test } from 'vitest';
import { randomStream } from '../../src/math/random.ts';
import { asymmetry } from '../../src/measure/asymmetry.ts';
import { relativeError } from '../sky/compare.ts';

const azimuth = Array.from({ length: 36 }, (_, k) => (k * Math.PI) / 18);
/** Mean of cos over the 17 sectors of cos > 0: (1 + 2 sum_1^8 cos 10 deg k)/17 = cot(5 deg)/17. */
const meanCos = 1 / Math.tan(Math.PI / 36) / 17;

test('a cosine of share a gives -a times the mean cosine of a half, approaching over receding', () => {
  const a = 0.4;
  const profile = azimuth.map((phi) => 5 * (1 + a * Math.cos(phi)));
  // Receding is brighter: negative.
  expect(relativeError(asymmetry(azimuth, profile, undefined, 'approaching-receding').value, -a * meanCos)).toBeLessThan(1e-13);
  expect(Math.abs(asymmetry(azimuth, profile, undefined, 'near-far').value)).toBeLessThan(1e-15);
  const near = azimuth.map((phi) => 5 * (1 - a * Math.sin(phi)));
  expect(relativeError(asymmetry(azimuth, near, undefined, 'near-far').value, a * meanCos)).toBeLessThan(1e-13);
});

test('points on the dividing line and blanks count for neither half', () => {
  const quarters = [0, Math.PI / 2, Math.PI, (3 * Math.PI) / 2];
  expect(asymmetry(quarters, [1, 100, 3, 200], undefined, 'approaching-receding')).toEqual({ value: 0.5, error: 0 });
  expect(asymmetry(quarters, [7, 1, 9, 3], undefined, 'near-far').value).toBe(0.5);
  expect(asymmetry([0, 0.1, Math.PI], [1, NaN, 3], undefined, 'approaching-receding').value).toBe(0.5);
  expect(asymmetry([0, 0.1], [1, 2], undefined, 'approaching-receding').value).toBeNaN();
  expect(asymmetry([0, Math.PI], [1, -1], undefined, 'approaching-receding').value).toBeNaN();
});

test('the error is that of the two means, as trials show', () => {
  const sigma = 0.3;
  const errors = azimuth.map(() => sigma);
  const [a, b] = [3, 2];
  const clean = azimuth.map((phi) => (Math.cos(phi) < 0 ? a : b));
  const stated = asymmetry(azimuth, clean, errors, 'approaching-receding').error;
  // 2 sqrt(a^2 + b^2)/(a + b)^2 times the error of a mean of 17.
  expect(relativeError(stated, ((2 * Math.hypot(a, b)) / 25) * (sigma / Math.sqrt(17)))).toBeLessThan(1e-12);
  const stream = randomStream(6, 'asymmetry');
  const trials = Array.from({ length: 2000 }, () => {
    const noisy = clean.map((value) => value + sigma * stream.gaussian());
    return asymmetry(azimuth, noisy, errors, 'approaching-receding').value - 0.2;
  });
  const rms = Math.sqrt(trials.reduce((sum, value) => sum + value * value, 0) / trials.length);
  // Four errors of an rms of 2000, 1/sqrt(4000).
  expect(relativeError(rms, stated)).toBeLessThan(4 / Math.sqrt(4000));
});
