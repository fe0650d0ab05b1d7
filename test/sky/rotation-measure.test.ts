import { expect, test } from 'vitest';
import { randomStream } from '../../src/math/random.ts';
import { depthSearch, fitRotationMeasure } from '../../src/sky/rotation-measure.ts';
import type { RotationMeasure } from '../../src/sky/rotation-measure.ts';
import { lambda2M2 } from '../../src/sky/wavelength.ts';
import { checkRow } from '../reference/check-rows.ts';
import { relativeError } from './compare.ts';

/** Frequencies of equal channels. */
function band(fromHz: number, toHz: number, channels: number): number[] {
  return Array.from({ length: channels }, (_, k) => fromHz + ((k + 0.5) * (toHz - fromHz)) / channels);
}

/** Q and U of a thin screen (Burn 1966): P e^{2i(chi0 + RM lambda^2)}. */
function spectrum(lambda2: readonly number[], rm: number, chi0: number, P: (k: number) => number = () => 1) {
  return {
    Q: lambda2.map((l, k) => P(k) * Math.cos(2 * (chi0 + rm * l))),
    U: lambda2.map((l, k) => P(k) * Math.sin(2 * (chi0 + rm * l))),
  };
}

function fit(lambda2: readonly number[], rm: number, chi0: number, P?: (k: number) => number): RotationMeasure {
  const { Q, U } = spectrum(lambda2, rm, chi0, P);
  const result = fitRotationMeasure(depthSearch(lambda2), Q, U, lambda2.map(() => 0));
  if (!result) throw new Error('no fit');
  return result;
}

const bandL = band(1.3e9, 1.7e9, 32).map(lambda2M2);
const bandC = [lambda2M2(4.8e9)];
const both = [...bandL, ...bandC];

test('noiseless spectra with many turns give back RM and angle, in one band and over a wide gap', () => {
  for (const lambda2 of [bandL, both]) {
    for (const rm of [0, 3, -47.3, 260, -1500, 3000]) {
      for (const chi0 of [0, 0.4, 1.6, 3.1]) {
        const result = fit(lambda2, rm, chi0, (k) => 1 + 0.5 * Math.cos(k));
        // Angles are good to 1e-15 of up to 150 rad, over a lambda^2 range of 0.02.
        expect(Math.abs(result.rm - rm)).toBeLessThan(1e-10);
        const turns = (result.chi0 - chi0) / Math.PI;
        expect(Math.abs(turns - Math.round(turns))).toBeLessThan(1e-12);
        expect(result.chi0).toBeGreaterThanOrEqual(0);
        expect(result.chi0).toBeLessThan(Math.PI);
        expect(result.residual).toBeLessThan(1e-12);
        expect([result.rmError, result.chi0Error, result.chi2]).toEqual([0, 0, NaN]);
      }
    }
  }
});

test('two wavelengths give the smallest |RM| of the ambiguous ones', () => {
  const lambda2 = [lambda2M2(1.4e9), lambda2M2(4.8e9)];
  const period = Math.PI / Math.abs(lambda2[0] - lambda2[1]);
  // 0.49 and 0.51 of the period either side of the ambiguity.
  for (const [rm, expected] of [
    [0.49 * period, 0.49 * period],
    [-0.49 * period, -0.49 * period],
    [0.51 * period, -0.49 * period],
    [-2.2 * period, -0.2 * period],
  ]) {
    expect(Math.abs(fit(lambda2, rm, 0.8).rm - expected)).toBeLessThan(1e-10);
  }
  expect(fit(lambda2, 5, 0.8).degreesOfFreedom).toBe(0);
});

test('the noise errors are those of Brentjens & de Bruyn 2005', () => {
  const lambda2 = Array.from({ length: 100 }, (_, k) => 0.02 + (0.07 * k) / 99);
  const { Q, U } = spectrum(lambda2, 40, 0.5);
  const result = fitRotationMeasure(depthSearch(lambda2), Q, U, lambda2.map(() => 0.3));
  expect(relativeError(result?.rmError ?? NaN, checkRow('6.sigphi')[0])).toBeLessThan(1e-12);
  expect(relativeError(result?.chi0Error ?? NaN, checkRow('6.sigchi0')[0])).toBeLessThan(1e-12);
});

test('over 400 noise draws there is no bias, the pulls have width 1 and chi^2 its mean', () => {
  for (const { lambda2, rm, sigma } of [
    { lambda2: bandL, rm: 260, sigma: 0.1 },
    { lambda2: both, rm: -47.3, sigma: 0.1 },
    { lambda2: [...band(1.3e9, 1.7e9, 8), ...band(2.1e9, 2.5e9, 4)].map(lambda2M2), rm: 900, sigma: 0.05 },
  ]) {
    const search = depthSearch(lambda2);
    const clean = spectrum(lambda2, rm, 0.02);
    const pulls: number[] = [];
    let chi2 = 0;
    for (let draw = 0; draw < 400; draw++) {
      const stream = randomStream(draw, 'rm pulls');
      const noisy = (values: readonly number[]): number[] => values.map((value) => value + sigma * stream.gaussian());
      const result = fitRotationMeasure(search, noisy(clean.Q), noisy(clean.U), lambda2.map(() => sigma));
      if (!result) throw new Error('no fit');
      pulls.push((result.rm - rm) / result.rmError);
      chi2 += result.chi2 / result.degreesOfFreedom / 400;
    }
    const mean = pulls.reduce((a, b) => a + b) / 400;
    const width = Math.sqrt(pulls.reduce((sum, pull) => sum + (pull - mean) ** 2, 0) / 399);
    // Four errors of a mean of 400, and of their width (1/sqrt(800)), which is within 0.1 too.
    expect(Math.abs(mean)).toBeLessThan(4 / 20);
    expect(Math.abs(width - 1)).toBeLessThan(0.1);
    // chi^2/dof has an rms of sqrt(2/(400 dof)); angles are Gaussian to (sigma/P)^2 = 1 %.
    expect(Math.abs(chi2 - 1)).toBeLessThan(4 * Math.sqrt(2 / (400 * (lambda2.length - 2))) + 0.03);
  }
});

test('a depolarized band does not lead the fit astray', () => {
  // P falls a hundredfold in the long band, where noise of its size then turns the angle at will.
  const stream = randomStream(9, 'depolarized');
  const lambda2 = [...band(1.3e9, 1.7e9, 8), ...band(4.2e9, 5.4e9, 8)].map(lambda2M2);
  const clean = spectrum(lambda2, 120, 1, (k) => (k < 8 ? 0.01 : 1));
  const noisy = (values: readonly number[]): number[] => values.map((value) => value + 0.01 * stream.gaussian());
  const result = fitRotationMeasure(depthSearch(lambda2), noisy(clean.Q), noisy(clean.U), lambda2.map(() => 0.01));
  if (!result) throw new Error('no fit');
  expect(Math.abs(result.rm - 120) / result.rmError).toBeLessThan(4);
  expect(result.rmError).toBeLessThan(5);
});

test('blank channels are left out, and too few wavelengths have no RM', () => {
  const lambda2 = [0.01, 0.02, 0.03, 0.045];
  const { Q, U } = spectrum(lambda2, 60, 0.3);
  Q[1] = NaN;
  const none = lambda2.map(() => 0);
  const result = fitRotationMeasure(depthSearch(lambda2), Q, U, none);
  expect(Math.abs((result?.rm ?? NaN) - 60)).toBeLessThan(1e-10);
  expect(result?.degreesOfFreedom).toBe(1);
  Q[0] = U[2] = NaN;
  expect(fitRotationMeasure(depthSearch(lambda2), Q, U, none)).toBeUndefined();
  expect(fitRotationMeasure(depthSearch(lambda2), none, none, none)).toBeUndefined();
  expect(() => depthSearch([0.04, 0.04])).toThrow(/two wavelengths/);
});

test('a search may be bounded', () => {
  const { Q, U } = spectrum(both, 400, 0.3);
  const bounded = fitRotationMeasure(depthSearch(both, 100), Q, U, both.map(() => 0));
  expect(Math.abs(bounded?.rm ?? NaN)).toBeLessThan(130);
  expect(depthSearch(both, 100).depths[0]).toBe(-100);
});
