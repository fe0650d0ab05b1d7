import { expect, test } from 'vitest';
import { randomStream } from '../../src/math/random.ts';
import {
  applyBeam,
  beamConvolver,
  beamMargin,
  beamReach,
  beamSolidAngleSr,
  pixelBeam,
} from '../../src/sky/beam.ts';
import { gridOffsetsKpc, wcsFromGrid } from '../../src/sky/grid.ts';
import { beamFactor } from '../reference/sky.ts';
import { largestDifference, relativeError } from './compare.ts';
import { smallGrid, zeroCube } from './cubes.ts';

const beam = { majorArcsec: 32, minorArcsec: 20, angle: 0.5 };
const grid = smallGrid(95, 96);
const sum = (plane: Float64Array): number => plane.reduce((a, b) => a + b, 0);

/** The beam's profile at sky offsets (arcsec), peak 1: exp(-4 ln 2 d^2/FWHM^2) along its axes. */
function profile(north: number, east: number): number {
  const along = north * Math.cos(beam.angle) + east * Math.sin(beam.angle);
  const across = east * Math.cos(beam.angle) - north * Math.sin(beam.angle);
  return Math.exp(-4 * Math.LN2 * ((along / beam.majorArcsec) ** 2 + (across / beam.minorArcsec) ** 2));
}

test('the solid angle is pi/(4 ln 2) times the axes', () => {
  const arcsec = Math.PI / 648000;
  // The factor is printed with nine digits.
  expect(relativeError(beamSolidAngleSr(beam), beamFactor * 32 * 20 * arcsec ** 2)).toBeLessThan(5e-9);
  expect(beamMargin(beam, grid)).toBe(24);
  expect(beamMargin(undefined, grid)).toBe(0);
});

test('a point becomes the elliptical Gaussian, turned from north through east, flux kept', () => {
  const cube = zeroCube(grid, [1.4e9]);
  const at = 47 * grid.nx + 46;
  cube.Q[at] = 1;
  const seen = applyBeam(cube, beam);
  expect(seen.unit).toBe('Jy/beam');
  const { northKpc, eastKpc } = gridOffsetsKpc(grid);
  const toArcsec = grid.pixelArcsec / grid.pixelKpc;
  // Jy/sr times beam area is Jy/beam; a pixel's flux spread with unit integral has this peak.
  const peak = grid.pixelArcsec ** 2 * (Math.PI / 648000) ** 2;
  const expected = northKpc.map(
    (north, k) => peak * profile((north - northKpc[at]) * toArcsec, (eastKpc[k] - eastKpc[at]) * toArcsec),
  );
  // The transfer function at the Nyquist frequency of the minor axis, exp(-3.56 (20/4/2)^2) = 2e-10, is cut there.
  expect(largestDifference(seen.Q, expected) / peak).toBeLessThan(1e-9);
  expect(relativeError(sum(seen.Q), beamSolidAngleSr(beam))).toBeLessThan(1e-10);
  expect(largestDifference(seen.U, cube.U)).toBeLessThan(1e-16 * beamSolidAngleSr(beam));
});

test('a wide Gaussian source stays one: the squares of widths add', () => {
  const round = { majorArcsec: 16, minorArcsec: 16, angle: 0 };
  const wide = smallGrid(64, 64);
  const { northKpc, eastKpc } = gridOffsetsKpc(wide);
  const toArcsec = wide.pixelArcsec / wide.pixelKpc;
  const gaussian = (fwhm: number): Float64Array =>
    northKpc.map((north, k) => Math.exp((-4 * Math.LN2 * toArcsec ** 2 * (north ** 2 + eastKpc[k] ** 2)) / fwhm ** 2));
  const plane = gaussian(30);
  beamConvolver(pixelBeam(round, wcsFromGrid(wide).cd), 64, 64)(plane);
  const expected = gaussian(34).map((value) => value * (30 / 34) ** 2);
  // Both Gaussians are sampled finely enough for the sums to equal the integrals; the edge cuts 1e-16.
  expect(largestDifference(plane, expected)).toBeLessThan(1e-10);
});

test('planes that share a transform do not mix, and the beam is linear', () => {
  const stream = randomStream(5, 'beam');
  const random = (): Float64Array => Float64Array.from({ length: grid.nx * grid.ny }, stream.gaussian);
  const [a, b] = [random(), random()];
  const convolve = beamConvolver(pixelBeam(beam, wcsFromGrid(grid).cd), grid.nx, grid.ny);
  const [pairA, pairB, alone] = [a.slice(), b.slice(), a.slice()];
  convolve(pairA, pairB);
  convolve(alone);
  expect(largestDifference(pairA, alone)).toBeLessThan(1e-14);
  const both = a.map((value, k) => 2 * value - 3 * b[k]);
  convolve(both);
  expect(largestDifference(both, pairA.map((value, k) => 2 * value - 3 * pairB[k]))).toBeLessThan(1e-13);
});

test('every Stokes plane of every channel sees the beam, for odd and even channel counts', () => {
  for (const channels of [[1.4e9], [1.4e9, 1.5e9], [1.4e9, 1.5e9, 1.6e9]]) {
    const cube = zeroCube(grid, channels);
    const pixels = grid.nx * grid.ny;
    channels.forEach((_, k) => {
      [cube.I, cube.Q, cube.U].forEach((planes, stokes) => (planes[k * pixels + 47 * grid.nx + 46] = 1 + k + 10 * stokes));
    });
    const seen = applyBeam(cube, beam);
    channels.forEach((_, k) => {
      [seen.I, seen.Q, seen.U].forEach((planes, stokes) => {
        const flux = sum(planes.subarray(k * pixels, (k + 1) * pixels)) / beamSolidAngleSr(beam);
        expect(relativeError(flux, 1 + k + 10 * stokes)).toBeLessThan(1e-10);
      });
    });
  }
});

test('a turned pixel matrix gives the turned beam', () => {
  const angle = 0.3;
  const [cos, sin] = [(Math.cos(angle) * 4) / 3600, (Math.sin(angle) * 4) / 3600];
  // Turning the camera by an angle turns the beam the other way in pixels.
  const turned = pixelBeam(beam, [-cos, sin, sin, cos]);
  const straight = pixelBeam({ ...beam, angle: beam.angle - angle }, [-4 / 3600, 0, 0, 4 / 3600]);
  for (const key of ['xx', 'xy', 'yy'] as const) expect(relativeError(turned[key], straight[key])).toBeLessThan(1e-12);
  // A beam along north (0.5 rad east of it) reaches farther along rows than along columns.
  expect(beamReach(straight).y).toBeGreaterThan(beamReach(straight).x);
});

test('a beam wider than the map overflows nothing', () => {
  const wide = pixelBeam({ majorArcsec: 400, minorArcsec: 40, angle: 0.8 }, wcsFromGrid(grid).cd);
  const plane = new Float64Array(20 * 20);
  plane[210] = 1;
  beamConvolver(wide, 20, 20)(plane);
  // The peak of a Gaussian of unit integral, 1/(beam area in pixels).
  expect(relativeError(plane[210], 1 / ((Math.PI / (4 * Math.LN2)) * 100 * 10))).toBeLessThan(1e-9);
});

test('a second beam, blanks and beams narrower than a pixel are refused', () => {
  const cube = zeroCube(grid, [1.4e9]);
  expect(() => applyBeam(applyBeam(cube, beam), beam)).toThrow(/Jy\/beam.*Jy\/sr only/);
  expect(() => applyBeam(cube, { ...beam, minorArcsec: 3.9 })).toThrow(/32 x 3.9 arcsec on pixels of 4 arcsec/);
  expect(() => applyBeam(cube, { majorArcsec: 4, minorArcsec: 4, angle: 0 })).not.toThrow();
  cube.U[7] = NaN;
  expect(() => applyBeam(cube, beam)).toThrow(/1 blank/);
});
