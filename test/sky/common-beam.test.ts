import { expect, test } from 'vitest';
import { randomStream } from '../../src/math/random.ts';
import type { Beam } from '../../src/scene/types.ts';
import { beamConvolver, beamSolidAngleSr, pixelBeam } from '../../src/sky/beam.ts';
import { beamBetween, beamChange, commonBeam, type PlaneFrame } from '../../src/sky/common-beam.ts';
import { wcsFromGrid } from '../../src/sky/grid.ts';
import { noiseMaker } from '../../src/sky/noise.ts';
import type { BrightnessUnit } from '../../src/sky/types.ts';
import { pixelAreaSr } from '../../src/sky/wcs.ts';
import { smallGrid } from './cubes.ts';
import { largestDifference, relativeError } from './compare.ts';

const n = 65;
const wcs = wcsFromGrid(smallGrid(n, n));
const from: Beam = { majorArcsec: 16, minorArcsec: 12, angle: 0.5 };
const to: Beam = { majorArcsec: 30, minorArcsec: 24, angle: 2 };

/** Peaks of 1; the narrow beam, 3 pixels wide, is cut off at the Nyquist frequency at 2e-6. */
const tolerance = 1e-5;

function point(beam: Beam, peak: number): Float64Array {
  const plane = new Float64Array(n * n);
  plane[32 * n + 32] = (peak * beamSolidAngleSr(beam)) / pixelAreaSr(wcs);
  beamConvolver(pixelBeam(beam, wcs.cd), n, n)(plane);
  return plane;
}

/** One plane brought to another beam, or itself. */
function convolveTo(map: PlaneFrame & { values: Float64Array }, from: Beam, to: Beam, unit: BrightnessUnit): { values: Float64Array; noiseFactor: number } {
  const change = beamChange(map, from, to, unit);
  return change ? { values: change.planes(map.values)[0], noiseFactor: change.noiseFactor } : { values: map.values, noiseFactor: 1 };
}

test('a point seen with one beam becomes the point seen with the other, in either unit', () => {
  const seen = convolveTo({ wcs, nx: n, ny: n, values: point(from, 1) }, from, to, 'Jy/beam');
  expect(largestDifference(seen.values, point(to, 1))).toBeLessThan(tolerance);
  const flat = new Float64Array(n * n).fill(3);
  const centre = convolveTo({ wcs, nx: n, ny: n, values: flat }, from, to, 'Jy/sr').values[32 * n + 32];
  expect(relativeError(centre, 3)).toBeLessThan(1e-9);
});

test('beams that differ by less than a pixel are brought together as well', () => {
  const wider: Beam = { majorArcsec: 16.1, minorArcsec: 12.05, angle: 0.5 };
  const seen = convolveTo({ wcs, nx: n, ny: n, values: point(from, 1) }, from, wider, 'Jy/beam');
  expect(largestDifference(seen.values, point(wider, 1))).toBeLessThan(tolerance);
});

test('covariances add: there and back is nothing, and a narrower beam is refused', () => {
  expect(beamBetween(from, from)).toBeUndefined();
  const between = beamBetween({ majorArcsec: 3, minorArcsec: 3, angle: 0 }, { majorArcsec: 5, minorArcsec: 5, angle: 1 });
  expect(relativeError(between?.majorArcsec ?? NaN, 4)).toBeLessThan(1e-12);
  expect(() => beamBetween(to, from)).toThrow(/narrower in some direction/);
  expect(commonBeam([from, from])).toEqual(from);
  expect(commonBeam([from, to]).minorArcsec).toBe(30);
  expect(() => commonBeam([])).toThrow(/at least one/);
});

test('noise falls as stated, and blanks stay blank', () => {
  const draw = noiseMaker(n, n, pixelBeam(from, wcs.cd));
  let square = 0;
  let factor = NaN;
  const draws = 30;
  for (let seed = 0; seed < draws; seed++) {
    const values = draw(randomStream(seed, 'test').gaussian);
    const seen = convolveTo({ wcs, nx: n, ny: n, values }, from, to, 'Jy/beam');
    factor = seen.noiseFactor;
    // The middle only: at the edges the sky beyond is dark.
    for (let row = 22; row < 43; row++) for (let column = 22; column < 43; column++) square += seen.values[row * n + column] ** 2 / (21 * 21 * draws);
  }
  // 30 draws of about 12 beams: 4 sigma is 4/sqrt(2 * 360).
  expect(relativeError(Math.sqrt(square), factor)).toBeLessThan(0.15);
  const holed = point(from, 1);
  holed[5] = NaN;
  const seen = convolveTo({ wcs, nx: n, ny: n, values: holed }, from, to, 'Jy/beam').values;
  expect(seen[5]).toBeNaN();
  expect(seen.filter(Number.isNaN).length).toBe(1);
});

test('two planes at once are each as alone, blanks and all', () => {
  const change = beamChange({ wcs, nx: n, ny: n }, from, to, 'Jy/beam');
  const [a, b] = [point(from, 1), Float64Array.from({ length: n * n }, (_, k) => (k === 7 ? NaN : Math.cos(k)))];
  const pair = change?.planes(a, b) ?? [];
  [a, b].forEach((plane, k) => {
    const [alone] = change?.planes(plane) ?? [];
    alone.forEach((value, pixel) => expect(Number.isNaN(value) ? Number.isNaN(pair[k][pixel]) : Math.abs(pair[k][pixel] - value) < 1e-12).toBe(true));
  });
});
