import { expect, test } from 'vitest';
import { arcsec } from '../../src/sky/grid.ts';
import { missingBeam, removeShortSpacings } from '../../src/sky/short-spacings.ts';
import { smallGrid, zeroCube } from './cubes.ts';
import { relativeError } from './compare.ts';

const n = 129;

/** A plane wave of `period` pixels along columns under a wide Gaussian, so that edges do not count. */
function wave(period: number): { cube: ReturnType<typeof zeroCube>; centre: number } {
  const cube = zeroCube(smallGrid(n, n), [1.4e9]);
  for (let k = 0; k < n * n; k++) {
    const [x, y] = [(k % n) - 64, Math.floor(k / n) - 64];
    const value = Math.cos((2 * Math.PI * x) / period) * Math.exp(-(x * x + y * y) / (2 * 16 ** 2));
    cube.I[k] = value;
    cube.Q[k] = 2 * value;
    cube.U[k] = -value;
  }
  return { cube, centre: 64 * n + 64 };
}

test('structure is halved at the spacing where half is missing, and fine structure is kept', () => {
  // Period 8 pixels of 4 arcsec: a spacing of 1/(32 arcsec).
  const { cube, centre } = wave(8);
  const seen = removeShortSpacings(cube, 1 / (32 * arcsec));
  // The Gaussian envelope (sigma 16 pixels) spreads u by 1/(2 pi 16), 8 % of u0: 1 - exp(-ln 2 u^2) within 2 %.
  for (const stokes of ['I', 'Q', 'U'] as const) expect(relativeError(seen[stokes][centre], cube[stokes][centre] / 2)).toBeLessThan(0.02);
  const fine = removeShortSpacings(cube, 1 / (32 * 4 * arcsec));
  expect(relativeError(fine.I[centre], 1 - Math.exp(-Math.LN2 * 16))).toBeLessThan(0.02);
});

test('the total flux is gone: an interferometer sees no zero spacing', () => {
  const cube = zeroCube(smallGrid(n, n), [1.4e9]);
  cube.I[64 * n + 64] = 1;
  const seen = removeShortSpacings(cube, 1 / (60 * arcsec));
  expect(Math.abs(seen.I.reduce((sum, value) => sum + value, 0))).toBeLessThan(1e-6);
  expect(cube.I[64 * n + 64]).toBe(1);
});

test('the Gaussian that is taken off, by its transform', () => {
  const beam = missingBeam(1000);
  // exp(-pi^2 theta^2 u^2/(4 ln 2)) of a Gaussian of FWHM theta is 1/2 at u = 1000.
  const theta = beam.majorArcsec * arcsec;
  expect(relativeError(Math.exp((-(Math.PI ** 2) * theta ** 2 * 1e6) / (4 * Math.LN2)), 0.5)).toBeLessThan(1e-12);
  expect(() => removeShortSpacings(zeroCube(smallGrid(8, 8), [1e9]), 1e6)).toThrow(/nothing would be left/);
});
