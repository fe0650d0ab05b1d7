import { expect, test } from 'vitest';
import { randomStream } from '../../src/math/random.ts';
import { pixelBeam } from '../../src/sky/beam.ts';
import { wcsFromGrid } from '../../src/sky/grid.ts';
import { addNoise, noiseMaker } from '../../src/sky/noise.ts';
import { smallGrid, zeroCube } from './cubes.ts';

const grid = smallGrid(24, 20);
const pixels = 24 * 20;
/** The mean of a list and the error of that mean. */
function meanAndError(values: readonly number[]): [mean: number, error: number] {
  const mean = values.reduce((a, b) => a + b, 0) / values.length;
  const squares = values.reduce((sum, value) => sum + (value - mean) ** 2, 0);
  return [mean, Math.sqrt(squares / (values.length - 1) / values.length)];
}

/** Mean over the plane of n(k) n(k + lag). */
function covarianceAt(noise: Float64Array, other: Float64Array, dx: number, dy: number): number {
  let sum = 0;
  let count = 0;
  for (let row = Math.max(0, -dy); row < 20 - Math.max(0, dy); row++) {
    for (let column = Math.max(0, -dx); column < 24 - Math.max(0, dx); column++, count++) {
      sum += noise[row * 24 + column] * other[(row + dy) * 24 + column + dx];
    }
  }
  return sum / count;
}

const beams = [
  { majorArcsec: 20, minorArcsec: 12, angle: 0.6 },
  // Half sampled: one pixel wide across.
  { majorArcsec: 9, minorArcsec: 4, angle: 1.2 },
];

test('over many seeds the rms is as stated and the autocorrelation is the beam', () => {
  for (const beam of beams) {
    const draw = noiseMaker(24, 20, pixelBeam(beam, wcsFromGrid(grid).cd));
    const planes = Array.from({ length: 400 }, (_, seed) => draw(randomStream(seed, 'noise test').gaussian));
    for (const [dx, dy] of [
      [0, 0],
      [1, 0],
      [0, 1],
      [2, 1],
      [-1, 2],
      [3, -3],
      [0, 8],
      [-9, 0],
    ]) {
      const [mean, error] = meanAndError(planes.map((plane) => covarianceAt(plane, plane, dx, dy)));
      // Column 0 is east: a step to the right is 4 arcsec to the west.
      const [north, east] = [4 * dy, -4 * dx];
      const along = (north * Math.cos(beam.angle) + east * Math.sin(beam.angle)) / beam.majorArcsec;
      const across = (east * Math.cos(beam.angle) - north * Math.sin(beam.angle)) / beam.minorArcsec;
      const expected = Math.exp(-4 * Math.LN2 * (along ** 2 + across ** 2));
      // Four errors of the 400 planes' own scatter.
      expect(Math.abs(mean - expected) / error).toBeLessThan(4);
      // A beam turned the other way would lie far outside.
      expect(error).toBeLessThan(0.02);
    }
  }
});

test('without a beam the noise is white, of the stated rms, in the cube and in its record', () => {
  const cube = zeroCube(grid, [1.4e9, 1.5e9]);
  cube.I.fill(5);
  const noisy = addNoise(cube, 0.25, 11);
  expect([...noisy.noise]).toEqual([0.25, 0.25]);
  const all = [...noisy.I.map((value) => value - 5), ...noisy.Q, ...noisy.U];
  const [mean, meanError] = meanAndError(all);
  const [square, squareError] = meanAndError(all.map((value) => value ** 2));
  expect(Math.abs(mean) / meanError).toBeLessThan(4);
  expect(Math.abs(square - 0.0625) / squareError).toBeLessThan(4);
  const planes = [0, 1].flatMap((k) => [noisy.Q, noisy.U].map((p) => p.subarray(k * pixels, (k + 1) * pixels)));
  const lag = planes.reduce((sum, plane) => sum + covarianceAt(plane, plane, 1, 0) / 4, 0);
  expect(Math.abs(lag)).toBeLessThan((4 * 0.0625) / Math.sqrt(4 * 23 * 20));
  expect(addNoise(noisy, 0.25, 12).noise[0]).toBe(Math.hypot(0.25, 0.25));
});

test('Stokes parameters, channels, bands and seeds have noise of their own; the same ones the same', () => {
  const beam = beams[0];
  const cube = { ...zeroCube(grid, [1.4e9, 1.5e9]), unit: 'Jy/beam', beam } as const;
  const first = addNoise(cube, 1, 3);
  const plane = (planes: Float64Array, k: number): Float64Array => planes.subarray(k * pixels, (k + 1) * pixels);
  const others = [
    plane(first.U, 0),
    plane(first.I, 0),
    plane(first.Q, 1),
    plane(addNoise(cube, 1, 4).Q, 0),
    plane(addNoise({ ...cube, band: 'C' }, 1, 3).Q, 0),
  ];
  // The product of two planes has the squared autocorrelation, half a beam of 17 pixels: 480/8.5 values, 4 sigma.
  for (const other of others) expect(Math.abs(covarianceAt(plane(first.Q, 0), other, 0, 0))).toBeLessThan(4 / Math.sqrt(56));
  for (const other of others) expect(plane(first.Q, 0)).not.toEqual(other);
  expect(addNoise(cube, 1, 3)).toEqual(first);
  expect(addNoise(cube, 2, 3).Q).toEqual(first.Q.map((value) => 2 * value));
});
