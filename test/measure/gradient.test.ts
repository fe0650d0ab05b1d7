import { expect, test } from 'vitest';
import { randomStream } from '../../src/math/random.ts';
import { frameFromGrid } from '../../src/measure/disc.ts';
import { axisGradient, gradientChange } from '../../src/measure/gradient.ts';
import { pixelBeam } from '../../src/sky/beam.ts';
import { wcsFromGrid, gridOffsetsKpc } from '../../src/sky/grid.ts';
import { noiseMaker } from '../../src/sky/noise.ts';
import { smallGrid } from '../sky/cubes.ts';
import { relativeError } from '../sky/compare.ts';

const grid = smallGrid(41, 41);
const place = { distanceKpc: 10_000 };
const { northKpc, eastKpc } = gridOffsetsKpc(grid);
const angle = 0.6;

const slope = northKpc.map((north, k) => 5 + 3 * (north * Math.cos(angle) + eastKpc[k] * Math.sin(angle)));

test('a plane gives its gradient along any axis', () => {
  const along = axisGradient(slope, undefined, frameFromGrid(grid), place, { angle });
  // SIN against small angles.
  expect(relativeError(along.gradient, 3)).toBeLessThan(1e-8);
  expect(relativeError(along.atCentre, 5)).toBeLessThan(1e-8);
  const narrow = axisGradient(slope, undefined, frameFromGrid(grid), place, { angle, halfWidthKpc: 1, halfLengthKpc: 2 });
  expect(relativeError(narrow.gradient, 3)).toBeLessThan(1e-8);
  expect(narrow.pixels).toBeLessThan(along.pixels / 3);
  const across = axisGradient(slope, undefined, frameFromGrid(grid), place, { angle: angle + Math.PI / 2 });
  expect(Math.abs(across.gradient)).toBeLessThan(1e-8);
  expect(axisGradient(slope.map(() => NaN), undefined, frameFromGrid(grid), place, { angle }).gradient).toBeNaN();
});

test('errors are those of noise correlated over a beam, stated or taken from the scatter', () => {
  const beam = { majorArcsec: 16, minorArcsec: 16, angle: 0 };
  const frame = frameFromGrid(grid, beam);
  const draw = noiseMaker(41, 41, pixelBeam(beam, wcsFromGrid(grid).cd));
  const pulls: number[] = [];
  const draws = 100;
  for (let seed = 0; seed < draws; seed++) {
    const noise = draw(randomStream(seed, 'gradient').gaussian);
    const noisy = slope.map((value, k) => value + 2 * noise[k]);
    const stated = axisGradient(noisy, noisy.map(() => 2), frame, place, { angle });
    pulls.push((stated.gradient - 3) / stated.gradientError);
    const own = axisGradient(noisy, undefined, frame, place, { angle });
    expect(Math.abs(own.gradientError / stated.gradientError - 1)).toBeLessThan(0.3);
  }
  const rms = Math.sqrt(pulls.reduce((sum, pull) => sum + pull * pull, 0) / draws);
  // The integral of the autocorrelation is the beam's solid angle; 4 sigma of 100 draws.
  expect(Math.abs(rms - 1)).toBeLessThan(4 / Math.sqrt(2 * draws));
});

test('the change of a gradient with wavelength is one number with an error', () => {
  const gradient = (value: number, error: number) => ({ gradient: value, gradientError: error, atCentre: 0, pixels: 10 });
  const { change, changeError, significance } = gradientChange([0.01, 0.05], [gradient(2, 0.3), gradient(4, 0.4)]);
  // (4 - 2)/0.04, sqrt(0.3^2 + 0.4^2)/0.04.
  expect(relativeError(change, 50)).toBeLessThan(1e-12);
  expect(relativeError(changeError, 12.5)).toBeLessThan(1e-12);
  expect(relativeError(significance, 4)).toBeLessThan(1e-12);
  expect(() => gradientChange([0.01], [gradient(1, 1)])).toThrow(/two bands/);
});
