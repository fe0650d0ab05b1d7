import { expect, test } from 'vitest';
import { axisOffsetsKpc, frameFromGrid } from '../../src/measure/disc.ts';
import { measureStrips } from '../../src/measure/strips.ts';
import { smallGrid } from '../sky/cubes.ts';
import { relativeError } from '../sky/compare.ts';

const grid = smallGrid(101, 101);
const frame = frameFromGrid(grid);
const orientation = { inclination: Math.PI / 2, positionAngle: 0.5, distanceKpc: 10_000 };
const spec = { stripEdgesKpc: [-1.5, 0, 1.5], boxEdgesKpc: [-6, -2, 2, 6] };

test('boxes hold the part of the sky between their edges, along the right axis', () => {
  const { alongMajor, alongMinor } = axisOffsetsKpc(frame, orientation);
  // Q grows along the major axis, I across it.
  const maps = { Q: alongMajor.map((x) => x + 20), U: alongMajor.map(() => 0), sigmaQU: 0, I: alongMinor };
  const major = measureStrips(maps, frame, orientation, { ...spec, parallelTo: 'major axis' });
  expect(major.map((strip) => strip.map((box) => [box.acrossKpc, box.alongKpc]))).toEqual([
    [[-0.75, -4], [-0.75, 0], [-0.75, 4]],
    [[0.75, -4], [0.75, 0], [0.75, 4]],
  ]);
  for (const box of major.flat()) {
    // 160 pixels a box of 4 x 1.5 kpc; their middles are off by a few per cent of a pixel.
    expect(Math.abs(box.P.value - 20 - box.alongKpc)).toBeLessThan(0.1);
    expect(Math.abs((box.I?.value ?? NaN) - box.acrossKpc)).toBeLessThan(0.06);
    expect(relativeError(box.pixels, 6 / grid.pixelKpc ** 2)).toBeLessThan(0.05);
  }
  const minor = measureStrips(maps, frame, orientation, { ...spec, parallelTo: 'minor axis' });
  for (const box of minor.flat()) {
    expect(Math.abs(box.P.value - 20 - box.acrossKpc)).toBeLessThan(0.1);
    expect(Math.abs((box.I?.value ?? NaN) - box.alongKpc)).toBeLessThan(0.06);
  }
});

test('the major axis is that of the receding half', () => {
  const { alongMajor } = axisOffsetsKpc(frame, orientation);
  // North 3 kpc, east 3 kpc tan(0.5): along the position angle.
  const [north, east] = [Math.round(3 / grid.pixelKpc), Math.round((3 * Math.tan(0.5)) / grid.pixelKpc)];
  const pixel = (50 + north) * 101 + 50 - east;
  // The nearest pixel's centre is within half a pixel's diagonal.
  expect(Math.abs(alongMajor[pixel] - 3 / Math.cos(0.5))).toBeLessThan(Math.SQRT1_2 * grid.pixelKpc);
});

test('edges that do not rise are refused', () => {
  const maps = { Q: new Float64Array(101 * 101), U: new Float64Array(101 * 101), sigmaQU: 0 };
  expect(() =>
    measureStrips(maps, frame, orientation, { ...spec, boxEdgesKpc: [1, 1], parallelTo: 'major axis' }),
  ).toThrow(/edges of boxes are 1, 1/);
});
