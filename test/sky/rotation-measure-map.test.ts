import { expect, test } from 'vitest';
import { rotationMeasureMaps } from '../../src/sky/rotation-measure-map.ts';
import type { StokesCube } from '../../src/sky/types.ts';
import { lambda2M2 } from '../../src/sky/wavelength.ts';
import { smallGrid, zeroCube } from './cubes.ts';

const grid = smallGrid(4, 3);
const rms = Float64Array.from({ length: 12 }, (_, pixel) => 30 * pixel - 150);

/** RM rising from pixel to pixel, chi0 = 0.1 per pixel, P = 2; noise is stated, not added. */
function cube(band: string, frequenciesHz: readonly number[], sigma: number): StokesCube {
  const result = zeroCube(grid, frequenciesHz, band);
  frequenciesHz.forEach((frequency, channel) => {
    rms.forEach((rm, pixel) => {
      const angle = 2 * (0.1 * pixel + rm * lambda2M2(frequency));
      result.Q[channel * 12 + pixel] = 2 * Math.cos(angle);
      result.U[channel * 12 + pixel] = 2 * Math.sin(angle);
    });
  });
  return { ...result, noise: result.noise.map(() => sigma) };
}

const bandL = [1.3e9, 1.35e9, 1.4e9, 1.5e9, 1.7e9];

test('maps join the channels of all bands; the field lies across chi0', () => {
  const maps = rotationMeasureMaps([cube('L', bandL, 0.1), cube('C', [4.8e9], 0.1)]);
  rms.forEach((rm, pixel) => {
    expect(Math.abs(maps.rm[pixel] - rm)).toBeLessThan(1e-10);
    expect(Math.abs(maps.chi0[pixel] - 0.1 * pixel)).toBeLessThan(1e-12);
    const field = (0.1 * pixel + Math.PI / 2) % Math.PI;
    expect(Math.abs(maps.fieldAngle[pixel] - field)).toBeLessThan(1e-12);
    expect(maps.chi2[pixel]).toBeLessThan(1e-20);
    expect(maps.rmError[pixel]).toBeGreaterThan(0);
  });
});

test('pixels are blank where P is lost in noise, or nothing beside the brightest without noise', () => {
  const noisy = cube('L', bandL, 0.1);
  const weak = [...bandL.keys()].map((channel) => channel * 12 + 3);
  for (const k of weak) [noisy.Q[k], noisy.U[k]] = [noisy.Q[k] * 0.14, noisy.U[k] * 0.14];
  const maps = rotationMeasureMaps([noisy]);
  expect([...maps.rm.keys()].filter((k) => Number.isNaN(maps.rm[k]))).toEqual([3]);
  expect(rotationMeasureMaps([noisy], { minimumSignalToNoise: 2.5 }).rm[3]).not.toBeNaN();
  const quiet = { ...noisy, noise: new Float64Array(5) };
  expect(rotationMeasureMaps([quiet]).rm[3]).not.toBeNaN();
  expect(rotationMeasureMaps([quiet], { minimumShare: 0.2 }).rm[3]).toBeNaN();
  for (const k of weak) quiet.Q[k] = quiet.U[k] = 0;
  const dark = rotationMeasureMaps([quiet]);
  expect(dark.rm[3]).toBeNaN();
  expect(dark.fieldAngle[3]).toBeNaN();
  for (let channel = 0; channel < 5; channel++) quiet.Q[channel * 12 + 5] = NaN;
  expect(rotationMeasureMaps([quiet]).rm[5]).toBeNaN();
});

test('cubes that do not belong together are refused', () => {
  const other = { ...cube('C', [4.8e9], 0), grid: { ...grid, pixelArcsec: 5 } };
  expect(() => rotationMeasureMaps([cube('L', bandL, 0), other])).toThrow(/band C lie on another grid/);
  expect(() => rotationMeasureMaps([cube('L', bandL, 0.1), cube('C', [4.8e9], 0)])).toThrow(/5 of 6 channels/);
  expect(() => rotationMeasureMaps([])).toThrow(/none were given/);
  expect(() => rotationMeasureMaps([cube('L', [1.4e9], 0)])).toThrow(/two wavelengths/);
});
