import { expect, test } from 'vitest';
import { randomStream } from '../../src/math/random.ts';
import { pixelSpectra, regionSpectrum, sumRegions, thermalShare } from '../../src/measure/region-spectrum.ts';
import { cubeInMemory } from '../../src/sky/cube-source.ts';
import { relativeError } from '../sky/compare.ts';

const [nx, ny] = [40, 700];
const channels = [1e9, 1.5e9, 2e9].map((frequencyHz) => ({ frequencyHz, widthHz: 0 }));
const { gaussian } = randomStream(1, 'regions');
const draw = (mean: number): Float64Array => Float64Array.from({ length: 3 * nx * ny }, () => mean + gaussian());
const [I, Q, U] = [draw(50), draw(3), draw(1)];
[I[5], Q[6], U[nx * ny + 7]] = [NaN, NaN, NaN];
const regionOf = Int32Array.from({ length: nx * ny }, (_, k) => (k % 3) - 1);
const regions = { nx, ny, regionOf, count: 2 };

const band = { channels, I: cubeInMemory(I, nx, ny), Q: cubeInMemory(Q, nx, ny), U: cubeInMemory(U, nx, ny), noise: [1, 2, 3] };

test('spectra of regions are plain means over their pixels, blanks left out, fractions of the non-thermal I', async () => {
  const thermal = (pixel: number): number => (pixel % 2 === 0 ? 0.2 : 0.1);
  const sums = await sumRegions([band], regions, thermal);
  for (const members of [[0], [1], [0, 1]]) {
    const { q, u, sigma, isFraction } = regionSpectrum(sums, members, { pixelsPerBeam: 10 });
    expect(isFraction).toBe(true);
    channels.forEach((_, c) => {
      let [sumI, sumQ, sumU, count] = [0, 0, 0, 0];
      regionOf.forEach((region, k) => {
        const at = c * nx * ny + k;
        const light = I[at] * (1 - thermal(k));
        if (!members.includes(region) || Number.isNaN(light + Q[at] + U[at])) return;
        [sumI, sumQ, sumU, count] = [sumI + light, sumQ + Q[at], sumU + U[at], count + 1];
      });
      // Sums of 18000 numbers.
      expect(relativeError(q[c], sumQ / sumI)).toBeLessThan(1e-12);
      expect(relativeError(u[c], sumU / sumI)).toBeLessThan(1e-12);
      const noise = (band.noise[c] / Math.sqrt(count / 10)) * (count / sumI);
      expect(relativeError(sigma[c], noise * Math.sqrt(1 + q[c] ** 2 + u[c] ** 2))).toBeLessThan(1e-12);
    });
  }
  const plain = regionSpectrum(sums, [0, 1], { pixelsPerBeam: 1, isPlain: true });
  expect(plain.isFraction).toBe(false);
  expect(Math.abs(plain.q[0] - 3)).toBeLessThan(0.03);
});

test('a pixel is a region of one, whichever way it is asked for', async () => {
  const spectrumOf = pixelSpectra([band], { nx, ny }, {});
  const alone = await sumRegions([band], { nx, ny, regionOf: Int32Array.from({ length: nx * ny }, (_, k) => [905, 17, 6].indexOf(k)), count: 3 });
  [905, 17, 6].forEach((pixel, k) => expect(spectrumOf(pixel)).toEqual(regionSpectrum(alone, [k], { pixelsPerBeam: 1 })));
  expect(spectrumOf(6).q[0]).toBeNaN();
  expect(spectrumOf(6).q[1]).not.toBeNaN();
});

test('no more rows are held at once than memory is meant for, and work can be stopped', async () => {
  const wide = Array.from({ length: 900 }, () => channels[0]);
  const values = new Float64Array(900 * 30 * 300);
  const cube = cubeInMemory(values, 30, 300);
  let most = 0;
  const counted = { ...cube, rows: (from: number, to: number) => ((most = Math.max(most, to - from)), cube.rows(from, to)) };
  const bare = { channels: wide, Q: counted, U: cube, noise: wide.map(() => 0) };
  await sumRegions([bare], { nx: 30, ny: 300, regionOf: new Int32Array(9000), count: 1 });
  // 64 MB for three Stokes parameters of doubles.
  expect(most).toBe(Math.floor(64e6 / (3 * 8 * 30 * 900)));
  await expect(sumRegions([band], regions, undefined, { signal: AbortSignal.abort(new Error('stop')) })).rejects.toThrow('stop');
});

test('a thermal share grows with frequency as nu^-0.1 over nu^-alpha does', () => {
  // 0.1 at 1 GHz: at 5 GHz 0.1 5^-0.1/(0.1 5^-0.1 + 0.9 5^-0.9) (numpy).
  expect(relativeError(thermalShare(0.1, 1e9, 5e9, 0.9), 0.2870665009325813)).toBeLessThan(1e-12);
  expect(thermalShare(0.1, 1e9, 1e9, 0.9)).toBe(0.1);
});
