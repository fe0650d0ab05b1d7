import { expect, test } from 'vitest';
import { randomStream } from '../../src/math/random.ts';
import { axisOffsetsKpc, discCoordinates, frameFromGrid, pixelsPerBeam } from '../../src/measure/disc.ts';
import type { DiscOrientation } from '../../src/measure/disc.ts';
import { fitHarmonics } from '../../src/measure/harmonics.ts';
import { measureRings } from '../../src/measure/rings.ts';
import { pixelBeam } from '../../src/sky/beam.ts';
import { wcsFromGrid } from '../../src/sky/grid.ts';
import { noiseMaker } from '../../src/sky/noise.ts';
import { smallGrid } from '../sky/cubes.ts';
import { largestDifference, relativeError } from '../sky/compare.ts';

const radian = Math.PI / 180;
const grid = smallGrid(121, 121);
const frame = frameFromGrid(grid);
const orientation: DiscOrientation = { inclination: 40 * radian, positionAngle: 25 * radian, distanceKpc: 10_000 };
const plane = (value: (k: number) => number): Float64Array => Float64Array.from({ length: 121 * 121 }, (_, k) => value(k));
const spec = { edgesKpc: [2, 4, 6], sectors: 12 };

/** Index of the pixel nearest to a sky offset, kpc. */
function pixelAt(north: number, east: number): number {
  return (60 + Math.round(north / grid.pixelKpc)) * 121 + 60 - Math.round(east / grid.pixelKpc);
}

test('azimuth is 0 on the receding half, and the near side is at -90 deg, for both senses of rotation', () => {
  for (const inclination of [40, 140]) {
    const turned = { ...orientation, inclination: inclination * radian };
    const { radiusKpc, azimuth } = discCoordinates(frame, turned);
    const pa = turned.positionAngle;
    const receding = pixelAt(5 * Math.cos(pa), 5 * Math.sin(pa));
    // The nearest pixel is off by up to 0.7 of 0.19 kpc in 5 kpc.
    expect(Math.abs(azimuth[receding])).toBeLessThan(0.04);
    expect(relativeError(radiusKpc[receding], 5)).toBeLessThan(0.03);
    // The near side lies at PA - 90 deg for i < 90 deg, at PA + 90 deg beyond; foreshortened by cos i.
    const side = inclination < 90 ? -90 : 90;
    const distance = 5 * Math.cos(40 * radian);
    const near = pixelAt(distance * Math.cos(pa + side * radian), distance * Math.sin(pa + side * radian));
    expect(Math.abs(azimuth[near] + Math.PI / 2)).toBeLessThan(0.04);
    expect(relativeError(radiusKpc[near], 5)).toBeLessThan(0.04);
  }
});

test('sky angle and disc azimuth obey tan(theta) = cos i tan(phi)', () => {
  const { azimuth } = discCoordinates(frame, orientation);
  const { alongMajor, alongMinor } = axisOffsetsKpc(frame, orientation);
  const theta = alongMajor.map((x, k) => alongMinor[k] / x);
  const expected = azimuth.map((phi) => Math.cos(orientation.inclination) * Math.tan(phi));
  for (let k = 0; k < theta.length; k += 37) {
    if (k === 60 * 121 + 60) continue;
    expect(Math.abs(Math.atan(theta[k]) - Math.atan(expected[k]))).toBeLessThan(1e-12);
  }
});

test('sectors are centred on multiples of their width and hold every pixel of the ring once', () => {
  const { radiusKpc, azimuth } = discCoordinates(frame, orientation);
  // I is the azimuth relative to the sector, Q the radius.
  const rings = measureRings(
    { Q: radiusKpc, U: plane(() => 0), sigmaQU: 0, I: azimuth.map((phi) => Math.cos(phi)) },
    frame,
    orientation,
    spec,
  );
  expect(rings.length).toBe(2);
  rings.forEach((ring, k) => {
    expect(ring.length).toBe(12);
    const inside = [...radiusKpc].filter((r) => r >= spec.edgesKpc[k] && r < spec.edgesKpc[k + 1]).length;
    expect(ring.reduce((sum, sector) => sum + sector.pixels, 0)).toBe(inside);
    ring.forEach((sector, j) => {
      expect(relativeError(sector.azimuth + 1, (j * Math.PI) / 6 + 1)).toBeLessThan(1e-15);
      expect([sector.innerKpc, sector.outerKpc]).toEqual([spec.edgesKpc[k], spec.edgesKpc[k + 1]]);
      // The mean of cos over a sector of width w is cos(middle) sin(w/2)/(w/2); pixels are about 60 a sector.
      const expected = Math.cos(sector.azimuth) * (Math.sin(Math.PI / 12) / (Math.PI / 12));
      expect(Math.abs((sector.I?.value ?? NaN) - expected)).toBeLessThan(0.03);
      // The mean radius of a ring is 2/3 (b^3 - a^3)/(b^2 - a^2).
      const [a, b] = [sector.innerKpc, sector.outerKpc];
      expect(relativeError(sector.P.value, ((2 / 3) * (b ** 3 - a ** 3)) / (b ** 2 - a ** 2))).toBeLessThan(0.02);
    });
  });
});

test('a map on a turned, shifted TAN grid gives the same profile as a straight one', () => {
  const centred = { ...orientation, centre: { raDeg: 150, decDeg: 20 } };
  const profile = (frameOf: typeof frame): number[] => {
    const { radiusKpc, azimuth } = discCoordinates(frameOf, centred);
    const maps = {
      Q: azimuth.map((phi) => 2 + Math.cos(phi)),
      U: radiusKpc.map(() => 0),
      sigmaQU: 0,
    };
    return measureRings(maps, frameOf, centred, spec)[1].map((s) => s.P.value);
  };
  const [cos, sin] = [(Math.cos(0.4) * 4) / 3600, (Math.sin(0.4) * 4) / 3600];
  const turned = {
    nx: 140,
    ny: 131,
    wcs: { projection: 'TAN', raDeg: 150.01, decDeg: 20.01, crpixX: 65, crpixY: 70, cd: [-cos, sin, sin, cos] },
  } as const;
  // About 90 pixels a sector fall otherwise: the means differ by pixelation only.
  expect(largestDifference(profile(turned), profile(frame))).toBeLessThan(0.02);
});

test('errors of sector means are those of noise with the beam correlated', () => {
  const beam = { majorArcsec: 20, minorArcsec: 16, angle: 0.3 };
  const seen = frameFromGrid(grid, beam);
  // pi/(4 ln 2) 20 16/4^2 pixels.
  expect(relativeError(pixelsPerBeam(seen), 22.6618007)).toBeLessThan(1e-8);
  const draw = noiseMaker(121, 121, pixelBeam(beam, wcsFromGrid(grid).cd));
  const wide = { edgesKpc: [1, 9], sectors: 8 };
  const pulls = { P: 0, chi: 0, I: 0, rm: 0 };
  const trials = 14;
  for (let seed = 0; seed < trials; seed++) {
    const [a, b, c, d] = ['Q', 'U', 'I', 'rm'].map((name) => draw(randomStream(seed, `rings/${name}`).gaussian));
    const maps = {
      Q: a.map((noise) => 20 + noise),
      U: b,
      sigmaQU: 1,
      I: c.map((noise) => 5 + 2 * noise),
      sigmaI: 2,
      rm: d.map((noise) => 30 + 3 * noise),
      rmError: plane(() => 3),
    };
    for (const sector of measureRings(maps, seen, orientation, wide)[0]) {
      const { P, chi, chiError, I, rm } = sector;
      pulls.P += ((P.value - 20) / P.error) ** 2;
      pulls.chi += (chi / chiError) ** 2;
      pulls.I += ((I?.value ?? NaN) - 5) ** 2 / (I?.error ?? NaN) ** 2;
      pulls.rm += ((rm?.value ?? NaN) - 30) ** 2 / (rm?.error ?? NaN) ** 2;
    }
  }
  // 112 sectors: the mean square pull has an error of sqrt(2/112) = 0.13. A sector of 22 beams has edges
  // that see noise from outside, so that its errors are up to a tenth smaller than stated.
  for (const sum of Object.values(pulls)) expect(Math.abs(sum / (8 * trials) - 0.95)).toBeLessThan(0.53);
});

test('P is the mean of debiased |P|, chi comes from the summed Q and U, RM weighs by variance', () => {
  // P = 5 everywhere with chi = 0.3 in one half of the pixels and 0.5 in the other: chi is between, P is kept.
  const chi = plane((k) => (k % 2 === 0 ? 0.3 : 0.5));
  const maps = {
    Q: chi.map((angle) => 5 * Math.cos(2 * angle)),
    U: chi.map((angle) => 5 * Math.sin(2 * angle)),
    sigmaQU: 3,
    rm: plane((k) => (k % 2 === 0 ? 10 : 40)),
    rmError: plane((k) => (k % 2 === 0 ? 1 : 2)),
  };
  const whole = measureRings(maps, frame, orientation, { edgesKpc: [0, 8], sectors: 1 })[0][0];
  expect(whole.beams).toBe(whole.pixels);
  expect(relativeError(whole.P.value, 4)).toBeLessThan(1e-12);
  expect(whole.P.scatter).toBeLessThan(1e-7);
  // Odd and even pixels are equal in number to one in 5000.
  expect(Math.abs(whole.chi - 0.4)).toBeLessThan(1e-3);
  expect(relativeError(whole.chiError, 3 / Math.sqrt(whole.pixels) / (2 * 5 * Math.cos(0.2)))).toBeLessThan(1e-3);
  // Weights 1 and 1/4: (10 + 40/4)/(1 + 1/4) = 16; variance 1/(n/2 (1 + 1/4)).
  expect(relativeError(whole.rm?.value ?? NaN, 16)).toBeLessThan(1e-2);
  expect(relativeError(whole.rm?.error ?? NaN, Math.sqrt(1.6 / whole.pixels))).toBeLessThan(1e-3);
  // 25 +- 15 with equal numbers.
  expect(relativeError(whole.rm?.scatter ?? NaN, 15)).toBeLessThan(1e-3);
  const plain = measureRings({ ...maps, rmError: undefined }, frame, orientation, { edgesKpc: [0, 8], sectors: 1 });
  expect(relativeError(plain[0][0].rm?.value ?? NaN, 25)).toBeLessThan(1e-2);
  expect(plain[0][0].rm?.error).toBe(0);
});

test('blank pixels are left out, and sectors without pixels are blank', () => {
  const Q = plane((k) => (k % 3 === 0 ? NaN : 2));
  const rings = measureRings({ Q, U: plane(() => 0), sigmaQU: 0 }, frame, orientation, { edgesKpc: [3, 5, 900, 901], sectors: 4 });
  const full = measureRings({ Q: plane(() => 2), U: plane(() => 0), sigmaQU: 0 }, frame, orientation, spec)[0];
  expect(rings[0][0].P.value).toBe(2);
  expect(rings[0][0].P.error).toBe(0);
  expect(rings[0][0].pixels).toBeGreaterThan(0);
  expect(full[0].I).toBeUndefined();
  expect(rings[2][1]).toMatchObject({ pixels: 0, beams: 0, chi: NaN, chiError: NaN, P: { value: NaN, error: NaN, scatter: NaN } });
});

test('the azimuth pattern of an axisymmetric disc shows its pitch angle, a bisymmetric one a double period', () => {
  const { azimuth } = discCoordinates(frame, orientation);
  const [pitch, beta] = [-20 * radian, 40 * radian];
  const fitted = (rm: Float64Array) => {
    const sectors = measureRings(
      { Q: plane(() => 1), U: plane(() => 0), sigmaQU: 0, rm },
      frame,
      orientation,
      { edgesKpc: [4, 10], sectors: 36 },
    )[0];
    return fitHarmonics(sectors.map((s) => s.azimuth), sectors.map((s) => s.rm?.value ?? NaN));
  };
  // RM = -A cos(phi - p) (Krause 1990): its maximum is at p + 180 deg = 160 deg.
  const axisymmetric = fitted(azimuth.map((phi) => -70 * Math.cos(phi - pitch)));
  // A sector's mean over 10 deg is 0.9987 of its middle; pixelation adds 0.3 %.
  expect(relativeError(axisymmetric.harmonics[0].amplitude, 70)).toBeLessThan(5e-3);
  expect(Math.abs(axisymmetric.harmonics[0].phase / radian - 160)).toBeLessThan(0.3);
  expect(axisymmetric.harmonics[1].amplitude).toBeLessThan(0.3);
  // cos(phi - p) cos(phi - beta) = [cos(2 phi - p - beta) + cos(p - beta)]/2 (Sofue et al. 1986).
  const bisymmetric = fitted(azimuth.map((phi) => 100 * Math.cos(phi - pitch) * Math.cos(phi - beta)));
  expect(Math.abs(bisymmetric.mean - 50 * Math.cos(60 * radian))).toBeLessThan(0.3);
  expect(relativeError(bisymmetric.harmonics[1].amplitude, 50)).toBeLessThan(1e-2);
  expect(Math.abs(bisymmetric.harmonics[1].phase / radian - 10)).toBeLessThan(0.3);
});

test('discs too near edge-on and specifications that make no rings are refused', () => {
  const maps = { Q: plane(() => 1), U: plane(() => 0), sigmaQU: 0 };
  const at = (inclination: number) => () =>
    measureRings(maps, frame, { ...orientation, inclination: inclination * radian }, spec);
  expect(at(75)).not.toThrow();
  expect(at(105)).not.toThrow();
  expect(at(76)).toThrow(/inclination of 76 deg.*strips/);
  expect(at(92)).toThrow(/92 deg/);
  const rings = (change: object) => () => measureRings(maps, frame, orientation, { ...spec, ...change });
  expect(rings({ edgesKpc: [3] })).toThrow(/two or more/);
  expect(rings({ edgesKpc: [3, 2] })).toThrow(/3, 2 kpc/);
  expect(rings({ edgesKpc: [-1, 2] })).toThrow(/-1 kpc/);
  expect(rings({ sectors: 2.5 })).toThrow(/2.5 sectors/);
  expect(() => measureRings({ ...maps, I: new Float64Array(3) }, frame, orientation, spec)).toThrow(/map of I has 3 pixels/);
});
