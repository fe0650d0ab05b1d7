import { expect, test } from 'vitest';
import { makeOriginMaps } from '../../src/measure/origin-map.ts';
import { walkOrigins } from '../../src/ray/origin.ts';
import { faradayDepthPerKpc } from '../../src/ray/synchrotron.ts';
import { lambda2M2 } from '../../src/sky/wavelength.ts';
import { relativeError } from '../sky/compare.ts';
import { slabScene } from './slab-scene.ts';

const centre = { northKpc: Float64Array.of(0), eastKpc: Float64Array.of(0) };
const frequencyHz = 1.4e9;

function mapsOf(electrons: number, along: number, inclinationDeg: number) {
  const scene = slabScene(electrons, along, inclinationDeg);
  const { maps, take } = makeOriginMaps(scene.galaxy.inclination, 1, 1);
  walkOrigins(scene, centre, [{ frequencyHz, centreHz: frequencyHz }], take);
  return maps;
}

test('without rotation a ray shows its slab evenly, from either side and slantwise', () => {
  for (const inclination of [0, 40, 140, 180]) {
    const maps = mapsOf(0, 2, inclination);
    // Between quadrature points, 1/500 of the slab apart, the share grows evenly.
    expect(Math.abs(maps.lowKpc[0] + 0.68)).toBeLessThan(0.002);
    expect(Math.abs(maps.medianKpc[0])).toBeLessThan(0.002);
    expect(Math.abs(maps.highKpc[0] - 0.68)).toBeLessThan(0.002);
    expect(Math.abs(maps.nearShare[0] - 0.5)).toBeLessThan(1e-9);
    expect(maps.cancelledShare[0]).toBe(0);
  }
});

test("Burn's slab: positive shares where |t| < pi/(2 a), the rest cancels", () => {
  // a = R lambda^2 of the whole slab, 0.9 pi: shares cos(a t), cumulative (1 + sin(a t))/2 of the positive ones.
  const a = 0.9 * Math.PI;
  const electrons = a / lambda2M2(frequencyHz) / (faradayDepthPerKpc * 2 * 2);
  for (const inclination of [0, 180]) {
    const maps = mapsOf(electrons, 2, inclination);
    expect(Math.abs(maps.highKpc[0] - Math.asin(2 * 0.84 - 1) / a)).toBeLessThan(0.003);
    expect(Math.abs(maps.lowKpc[0] + Math.asin(2 * 0.84 - 1) / a)).toBeLessThan(0.003);
    // The sign changes inside panels of a sixteenth.
    expect(Math.abs(maps.cancelledShare[0] - (1 - Math.sin(a)) / (2 - Math.sin(a)))).toBeLessThan(0.005);
  }
});

test('what lies in front is near, whichever pole is turned to the observer; edge-on nothing is', () => {
  const pieces = { count: 3, z: Float64Array.of(1, 0.5, -1), depth: Float64Array.of(0, 1, 2), wholeDepth: 3, shares: [Float64Array.of(3, -1, 2)], emitted: Float64Array.of(6) };
  for (const [inclination, near] of [[0.7, 0.6], [2.5, 0.4], [Math.PI / 2, NaN]]) {
    const { maps, take } = makeOriginMaps(inclination, 2, 1);
    take(1, pieces);
    expect(maps.nearShare[1]).toBe(near);
    expect(relativeError(maps.cancelledShare[1], 1 / 6)).toBeLessThan(1e-14);
    expect(maps.medianKpc[0]).toBeNaN();
  }
  // |P| below 1 % of what is emitted: nothing is said.
  const { maps, take } = makeOriginMaps(0.7, 1, 1);
  take(0, { ...pieces, emitted: Float64Array.of(401) });
  expect(maps.medianKpc[0]).toBeNaN();
});
