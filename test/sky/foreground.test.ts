import { expect, test } from 'vitest';
import type { Observation } from '../../src/scene/types.ts';
import { arcsec, wcsFromGrid } from '../../src/sky/grid.ts';
import { foregroundDepths, largestForeground } from '../../src/sky/foreground.ts';
import { emptyScene, smallGrid } from './cubes.ts';
import { largestDifference } from './compare.ts';

function depths(nx: number, more: Partial<Observation>, seed = 7): number | Float64Array {
  const scene = emptyScene(nx, nx);
  const changed = { ...scene, observation: { ...scene.observation, ...more }, numerics: { ...scene.numerics, seed } };
  return foregroundDepths(changed, wcsFromGrid(smallGrid(nx, nx)), nx, nx);
}

test('a constant foreground is one number', () => {
  expect(depths(5, { foregroundDepth: -12 })).toBe(-12);
  expect(largestForeground(-12)).toBe(12);
});

test('a gradient grows along its angle, north through east, and is 0 at the centre', () => {
  const gradient = { radM2PerArcsec: 0.5, angle: Math.PI / 2 };
  const map = depths(5, { foregroundDepth: 3, foregroundGradient: gradient });
  // East is towards low columns; pixels of 4 arcsec: 2 rad m^-2 a column.
  const expected = Float64Array.from({ length: 25 }, (_, k) => 3 + 2 * (2 - (k % 5)));
  // SIN against small angles: 1e-9 at 8 arcsec.
  expect(largestDifference(map as Float64Array, expected)).toBeLessThan(1e-8);
  const north = depths(5, { foregroundGradient: { ...gradient, angle: 0 } }) as Float64Array;
  expect(Math.abs(north[22] - 4)).toBeLessThan(1e-8);
});

test('a random screen has the rms and autocorrelation stated, over many seeds', () => {
  const nx = 64;
  const [scale, rms] = [10, 30];
  const sums = { square: 0, lag: 0 };
  const perSeed: number[] = [];
  const lag = 3;
  const seeds = 60;
  for (let seed = 0; seed < seeds; seed++) {
    const map = depths(nx, { foregroundScreen: { rmsRadM2: rms, scaleArcsec: scale } }, seed) as Float64Array;
    let [square, product] = [0, 0];
    for (let row = 0; row < nx; row++) {
      for (let column = 0; column < nx - lag; column++) {
        square += map[row * nx + column] ** 2;
        product += map[row * nx + column] * map[row * nx + column + lag];
      }
    }
    const count = nx * (nx - lag);
    sums.square += square / count / seeds;
    sums.lag += product / count / seeds;
    perSeed.push(square / count);
  }
  // 4 sigma of the run's own scatter.
  const mean = sums.square;
  const error = Math.sqrt(perSeed.reduce((sum, v) => sum + (v - mean) ** 2, 0) / (seeds - 1) / seeds);
  expect(Math.abs(mean - rms ** 2)).toBeLessThan(4 * error);
  // exp(-(12 arcsec/10 arcsec)^2) at a lag of 3 pixels.
  expect(Math.abs(sums.lag / mean - Math.exp(-1.44))).toBeLessThan(0.06);
});

test('one seed gives one screen; scales that cannot be drawn are refused in words', () => {
  const screen = { foregroundScreen: { rmsRadM2: 30, scaleArcsec: 10 } };
  expect(depths(16, screen)).toEqual(depths(16, screen));
  expect(depths(16, screen)).not.toEqual(depths(16, screen, 8));
  expect(() => depths(16, { foregroundScreen: { rmsRadM2: 30, scaleArcsec: 1 } })).toThrow(/scale of 1 arcsec on pixels of 4/);
  expect(() => depths(16, { foregroundScreen: { rmsRadM2: 30, scaleArcsec: 9e4 } })).toThrow(/cannot be drawn/);
});

test('radians per arcsec', () => {
  expect(Math.abs(arcsec * 206264.80624709636 - 1)).toBeLessThan(1e-12);
});
