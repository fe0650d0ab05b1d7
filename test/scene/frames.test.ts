import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import type { Vector3 } from '../../src/scene/frames.ts';
import { frameOf, galaxyFromSky, skyFromGalaxy } from '../../src/scene/frames.ts';

const degree = Math.PI / 180;
const axes: readonly Vector3[] = [[1, 0, 0], [0, 1, 0], [0, 0, 1]];
const dot = (a: Vector3, b: Vector3): number => a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
const cross = (a: Vector3, b: Vector3): Vector3 => [a[1] * b[2] - a[2] * b[1], a[2] * b[0] - a[0] * b[2], a[0] * b[1] - a[1] * b[0]];
const angles = fc.tuple(fc.double({ min: 0, max: Math.PI, noNaN: true }), fc.double({ min: -7, max: 7, noNaN: true }));
/** Products of two cosines and a sum or two: a few roundings of numbers below 1. */
const rounding = 1e-15;

function expectNear(given: Vector3, wanted: Vector3, tolerance = rounding): void {
  given.forEach((value, k) => expect(Math.abs(value - wanted[k])).toBeLessThanOrEqual(tolerance));
}

test('the frame is orthonormal and right-handed, k = N x E', () => {
  fc.assert(
    fc.property(angles, ([inclination, positionAngle]) => {
      const frame = frameOf(inclination, positionAngle);
      const [north, east, towards] = axes.map((axis) => galaxyFromSky(frame, axis));
      for (const vector of [north, east, towards]) expect(Math.abs(dot(vector, vector) - 1)).toBeLessThan(rounding);
      for (const [a, b] of [[north, east], [east, towards], [towards, north]]) expect(Math.abs(dot(a, b))).toBeLessThan(rounding);
      expectNear(cross(north, east), towards);
      const [x, y, z] = axes.map((axis) => skyFromGalaxy(frame, axis));
      expectNear(cross(z, x), y);
    }),
    { seed: 3, numRuns: 300 },
  );
});

test('there and back is the same vector', () => {
  fc.assert(
    fc.property(angles, fc.tuple(...axes.map(() => fc.double({ min: -20, max: 20, noNaN: true }))), ([i, pa], vector) => {
      const frame = frameOf(i, pa);
      expectNear(skyFromGalaxy(frame, galaxyFromSky(frame, vector as unknown as Vector3)), vector as unknown as Vector3, 20 * 10 * Number.EPSILON);
    }),
    { seed: 4, numRuns: 300 },
  );
});

describe('physics.md section 2, formula by formula', () => {
  const [i, pa] = [40 * degree, 25 * degree];
  const frame = frameOf(i, pa);
  const [north, east, s] = [3, -2, 1.5];

  test('a ray at (N, E), depth s', () => {
    const xiX = north * Math.cos(pa) + east * Math.sin(pa);
    const xiC = -north * Math.sin(pa) + east * Math.cos(pa);
    const wanted: Vector3 = [xiX, xiC * Math.cos(i) - s * Math.sin(i), xiC * Math.sin(i) + s * Math.cos(i)];
    expectNear(galaxyFromSky(frame, [north, east, s]), wanted, 4 * 4 * Number.EPSILON);
  });

  test('k = (0, -sin i, cos i) and c = (0, cos i, sin i) in galaxy axes', () => {
    expectNear(galaxyFromSky(frame, [0, 0, 1]), [0, -Math.sin(i), Math.cos(i)]);
    expectNear(galaxyFromSky(frame, [-Math.sin(pa), Math.cos(pa), 0]), [0, Math.cos(i), Math.sin(i)]);
  });

  test('the receding half of the line of nodes lies at PA from N through E', () => {
    expectNear(skyFromGalaxy(frame, [1, 0, 0]), [Math.cos(pa), Math.sin(pa), 0]);
  });

  test('the receding side recedes: velocity z x r at +x has k < 0', () => {
    const velocity = skyFromGalaxy(frame, cross([0, 0, 1], [1, 0, 0]));
    expect(velocity[2]).toBeLessThan(-0.6);
  });

  test('the near side is -y, at PA - 90 deg for i < 90 deg', () => {
    const near = skyFromGalaxy(frame, [0, -1, 0]);
    expect(near[2]).toBeGreaterThan(0);
    expect(Math.abs(Math.atan2(near[1], near[0]) - (pa - Math.PI / 2))).toBeLessThan(rounding * 4);
  });

  test.each([[40, 1], [125, -1]])('i = %d deg turns %d (1 counter-clockwise: from N to E)', (inclination, sense) => {
    const tilted = frameOf(inclination * degree, 0);
    // East is left of north on the sky, so N -> E is counter-clockwise.
    const [from, to] = [0, 0.1].map((phi) => skyFromGalaxy(tilted, [Math.cos(phi), Math.sin(phi), 0]));
    expect(Math.sign(from[0] * to[1] - from[1] * to[0])).toBe(sense);
  });
});

test.each([
  [0, 0, [1, 2, 3], [1, 2, 3]],
  [90, 0, [1, 2, 3], [1, -3, 2]],
  [180, 0, [1, 2, 3], [1, -2, -3]],
  [0, 90, [1, 2, 3], [2, -1, 3]],
  [0, 180, [1, 2, 3], [-1, -2, 3]],
  [90, 270, [1, 2, 3], [-2, -3, 1]],
  [0, -90, [1, 2, 3], [-2, 1, 3]],
  [0, 360, [1, 2, 3], [1, 2, 3]],
] as const)('multiples of a quarter turn are exact: i = %d, PA = %d', (inclination, positionAngle, sky, galaxy) => {
  const given = galaxyFromSky(frameOf(inclination * degree, positionAngle * degree), sky);
  expect(given.map((value) => value + 0)).toEqual(galaxy);
});

test('near a quarter turn nothing snaps', () => {
  expect(frameOf(Math.PI / 2 - 1e-9, 0).cosInclination).toBe(Math.cos(Math.PI / 2 - 1e-9));
});
