import { expect, test } from 'vitest';
import {
  cropCube,
  cropPlanes,
  gridFromScene,
  gridOffsetsKpc,
  growGrid,
  offsetsKpc,
  wcsFromGrid,
} from '../../src/sky/grid.ts';
import { memoryNeededBytes, refuseTooLarge } from '../../src/sky/memory.ts';
import { largestDifference, relativeError } from './compare.ts';
import { emptyScene, smallGrid, zeroCube } from './cubes.ts';

test('a scene puts the galaxy at pixel (n + 1)/2, between pixels where n is even', () => {
  const grid = gridFromScene(emptyScene(5, 4));
  expect([grid.crpixX, grid.crpixY, grid.raDeg, grid.decDeg]).toEqual([3, 2.5, 150, 20]);
  // 1 arcsec at 1 Mpc is 4.84814 pc (definition of the arcsec).
  expect(relativeError(grid.pixelKpc, 4 * 10 * 4.84813681109536e-3)).toBeLessThan(1e-14);
  const { northKpc, eastKpc } = gridOffsetsKpc(grid);
  // Row 0 south, column 0 east.
  expect(northKpc[0] / grid.pixelKpc).toBe(-1.5);
  expect(eastKpc[0] / grid.pixelKpc).toBe(2);
  expect(eastKpc[2]).toBe(0);
  expect(northKpc[19] / grid.pixelKpc).toBe(1.5);
});

test('a grid and its celestial axes mean the same offsets', () => {
  const grid = smallGrid(40, 31);
  const direct = gridOffsetsKpc(grid);
  const through = offsetsKpc(wcsFromGrid(grid), 40, 31, 10_000);
  // Direction cosines lose 1e-16 of the unit vector, times 10 Mpc.
  expect(largestDifference(through.northKpc, direct.northKpc)).toBeLessThan(1e-11);
  expect(largestDifference(through.eastKpc, direct.eastKpc)).toBeLessThan(1e-11);
});

test('a centre that is not the reference point moves the offsets', () => {
  const grid = smallGrid(9, 9);
  const centre = { raDeg: 150, decDeg: 20 + 8 / 3600 };
  const { northKpc } = offsetsKpc(wcsFromGrid(grid), 9, 9, 10_000, centre);
  // Two pixels north of the reference, exact but for the sine of 8 arcsec.
  expect(Math.abs(northKpc[4 * 9 + 4] / grid.pixelKpc + 2)).toBeLessThan(1e-8);
});

test('growing and cropping undo each other', () => {
  const grid = smallGrid(4, 3);
  const grown = growGrid(grid, 2);
  expect([grown.nx, grown.ny, grown.crpixX, grown.crpixY]).toEqual([8, 7, 4.5, 4]);
  const cube = zeroCube(grown, [1.4e9, 1.5e9]);
  const { northKpc, eastKpc } = gridOffsetsKpc(grown);
  cube.Q.set(northKpc, northKpc.length);
  cube.U.set(eastKpc, eastKpc.length);
  const cropped = cropCube(cube, 2);
  const inner = gridOffsetsKpc(grid);
  expect(cropped.grid).toEqual(grid);
  expect(cropped.Q.subarray(12)).toEqual(inner.northKpc);
  expect(cropped.U.subarray(12)).toEqual(inner.eastKpc);
  expect(cropPlanes(cube.Q, 8, 7, 0)).toEqual(cube.Q);
  expect(() => cropCube(cube, 4)).toThrow(/margin of 4/);
});

test('memory counts the rays of the grown grid, and too much is refused with its size', () => {
  const size = { nx: 100, ny: 100, margin: 14, channels: 10, frequencies: 20 };
  // 128^2 rays x (3 + 3 x 20 + 3 x 10) numbers and three transforms of 256^2, 8 bytes each.
  expect(memoryNeededBytes(size)).toBe(8 * (128 * 128 * 93 + 3 * 256 * 256));
  expect(() => refuseTooLarge(size)).not.toThrow();
  expect(() => refuseTooLarge({ ...size, nx: 20_000, ny: 20_000 })).toThrow(/20000 x 20000 .* GB of memory/);
  expect(() => refuseTooLarge(size, 1e6)).toThrow(/0.0138 GB.*0.001 GB/);
});
