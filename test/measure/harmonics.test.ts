import { expect, test } from 'vitest';
import { randomStream } from '../../src/math/random.ts';
import { fitHarmonics } from '../../src/measure/harmonics.ts';
import { needPython, pythonJson } from '../support/tools.ts';
import { relativeError } from '../sky/compare.ts';

const azimuth = Array.from({ length: 18 }, (_, k) => (k * Math.PI) / 9);
const truth = [
  { order: 1, amplitude: 2.5, phase: 2.7 },
  { order: 2, amplitude: 0.4, phase: 3.0 },
  { order: 3, amplitude: 1.1, phase: 0.2 },
];
const model = (phi: number): number =>
  7 + truth.reduce((sum, { order, amplitude, phase }) => sum + amplitude * Math.cos(order * (phi - phase)), 0);

test('exact cosines come back, evenly spaced or not, weighted or not, blanks left out', () => {
  const uneven = azimuth.map((phi, k) => phi + 0.1 * Math.sin(5 * k));
  const errors = azimuth.map((_, k) => 0.1 + 0.02 * k);
  for (const [points, sigma] of [
    [azimuth, undefined],
    [uneven, errors],
  ] as const) {
    const values = points.map(model);
    values[4] = NaN;
    const fit = fitHarmonics(points, values, sigma);
    expect(relativeError(fit.mean, 7)).toBeLessThan(1e-12);
    fit.harmonics.forEach((harmonic, k) => {
      expect(harmonic.order).toBe(k + 1);
      expect(relativeError(harmonic.amplitude, truth[k].amplitude)).toBeLessThan(1e-12);
      expect(relativeError(harmonic.phase, truth[k].phase)).toBeLessThan(1e-12);
    });
    expect(fit.degreesOfFreedom).toBe(10);
  }
});

test('coefficients, errors and chi^2 are those of numpy least squares', (context) => {
  needPython(context, 'numpy');
  const stream = randomStream(8, 'harmonics');
  const errors = azimuth.map((_, k) => 0.1 + 0.02 * k);
  const values = azimuth.map((phi, k) => model(phi) + errors[k] * stream.gaussian());
  const [mean, meanError, amplitude, amplitudeError, phaseError, chi2] = pythonJson(
    `import json, sys, numpy as np
phi, y, s = map(np.array, json.load(sys.stdin))
A = np.column_stack([np.ones_like(phi)] + [f(m * phi) for m in (1, 2, 3) for f in (np.cos, np.sin)]) / s[:, None]
p = np.linalg.lstsq(A, y / s, rcond=None)[0]
C = np.linalg.inv(A.T @ A)
a = np.hypot(p[3], p[4])
ja = np.array([p[3], p[4]]) / a; jp = np.array([-p[4], p[3]]) / a**2 / 2
B = C[3:5, 3:5]
print(json.dumps([p[0], C[0, 0]**0.5, a, (ja @ B @ ja)**0.5, (jp @ B @ jp)**0.5, float(np.sum((y / s - A @ p)**2))]))`,
    [],
    JSON.stringify([azimuth, values, errors]),
  ) as number[];
  const fit = fitHarmonics(azimuth, values, errors);
  const second = fit.harmonics[1];
  for (const [mine, theirs] of [
    [fit.mean, mean],
    [fit.meanError, meanError],
    [second.amplitude, amplitude],
    [second.amplitudeError, amplitudeError],
    [second.phaseError, phaseError],
    [fit.chi2, chi2],
  ]) {
    expect(relativeError(mine, theirs)).toBeLessThan(1e-10);
  }
});

test('without errors they come from the scatter: sigma sqrt(2/n) for an amplitude', () => {
  const many = Array.from({ length: 720 }, (_, k) => (k * Math.PI) / 360);
  const stream = randomStream(4, 'scatter');
  const fit = fitHarmonics(many, many.map((phi) => model(phi) + 0.5 * stream.gaussian()));
  // The scatter of 713 degrees of freedom is known to 1/sqrt(1426) = 2.6 %; four of them.
  expect(relativeError(fit.harmonics[0].amplitudeError, 0.5 * Math.sqrt(2 / 720))).toBeLessThan(0.11);
  expect(relativeError(fit.meanError, 0.5 / Math.sqrt(720))).toBeLessThan(0.11);
  expect(fit.chi2).toBeNaN();
  expect(Math.abs(fit.harmonics[0].amplitude - 2.5) / fit.harmonics[0].amplitudeError).toBeLessThan(4);
});

test('a harmonic that is not there has a phase of which nothing is known', () => {
  const fit = fitHarmonics(azimuth, azimuth.map(() => 3), azimuth.map(() => 0.1), 2);
  expect(fit.harmonics[1].amplitude).toBeLessThan(1e-14);
  expect(fit.harmonics[1].phaseError).toBe(Math.PI / (2 * Math.sqrt(3)));
});

test('azimuths that cannot tell harmonics apart, and errors of zero in part, are refused', () => {
  expect(() => fitHarmonics(azimuth.slice(0, 6), azimuth.slice(0, 6))).toThrow(/6 values .* 7 terms/);
  // Eight even points cannot see sin 4 phi.
  const eight = Array.from({ length: 10 }, (_, k) => ((k % 8) * Math.PI) / 4);
  expect(() => fitHarmonics(eight, eight, undefined, 4)).toThrow(/the way they lie/);
  expect(() => fitHarmonics(azimuth, azimuth, azimuth.map((_, k) => k))).toThrow(/error of zero/);
});
