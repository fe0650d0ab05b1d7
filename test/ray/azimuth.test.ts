import { expect, test } from 'vitest';
import { wavelengthSquared } from '../../src/ray/synchrotron.ts';
import { relativeError } from '../sky/compare.ts';
import { follow, frequencies, sceneOf } from './scenes.ts';

// Rows of section 10 of the check values: axisymmetric and bisymmetric fields of pitch p in a thin
// layer (Sofue et al. 1986; Krause 1990; both from memory there, recomputed).
const deg = Math.PI / 180;
const inclination = 30;
const thicknessKpc = 1e-3;
const slab = (key: string): string => `{model: slab, ${key}, halfThickness: ${thicknessKpc / 2} kpc}`;

/** A planar field of pitch -20° and 5 uG times a factor of phi, seen at points of the disc. */
function layerScene(factor: string, index = 2.6) {
  const field = `{model: formula, name: planar, parameters: {b: 5 uG, p: -20 deg}, field: {r: "b*sin(p)*${factor}", phi: "b*cos(p)*${factor}"}}`;
  return sceneOf({ tolerance: 1e-10, inclination, height: 0.5, index, field: [field], electrons: [slab('density: 0.03 cm^-3')], layers: [slab('normalisation: 1e-5 cm^-3')] });
}

/** North and east of points of the plane at 10 kpc, position angle 0. */
function ring(azimuthsDeg: readonly number[]): [number[], number[]] {
  return [azimuthsDeg.map((phi) => 10 * Math.cos(phi * deg)), azimuthsDeg.map((phi) => 10 * Math.sin(phi * deg) * Math.cos(inclination * deg))];
}

/** Row 10.amp: K n_e B 2h tan i for 0.03 cm^-3, 5 uG, 2h = 1000 pc, i = 30°. */
const amplitude = 70.31270335290867 * thicknessKpc;

test('axisymmetric: RM of the background is -amplitude · cos(φ - p)', () => {
  // Row 10.ass: B_∥/B = -cos(φ - p) sin i at φ = 0, 70, 160, 250 for p = -20°.
  const expected = [-0.46984631039295405, 0, 0.49999999999999983, 0];
  const { faradayDepth } = follow(layerScene('1'), frequencies(5e9), ...ring([0, 70, 160, 250]));
  // Along a path of 1 pc the azimuth changes by 5e-5, evenly to both sides: second order.
  expected.forEach((value, k) => expect(Math.abs(faradayDepth[k] - (amplitude * value) / Math.sin(inclination * deg))).toBeLessThan(1e-8 * amplitude));
});

test('emission mixed with the layer shows half of that (row 10.amp)', () => {
  const spectrum = frequencies(4e9, 4.2e9);
  const result = follow(layerScene('1'), spectrum, ...ring([160]));
  const chi = (f: number): number => 0.5 * Math.atan2(result.U[f], result.Q[f]);
  const slope = (chi(0) - chi(1)) / (wavelengthSquared(4e9) - wavelengthSquared(4.2e9));
  // A turn of 2e-4 rad, from angles good to 1e-15, and the path's own change of azimuth.
  expect(relativeError(slope, 35.156351676454335 * thicknessKpc)).toBeLessThan(1e-8);
});

test('bisymmetric: two periods and an offset', () => {
  // Row 10.bss: cos(φ - p) cos(φ - β) at φ = 0, 10, 100 for p = -20°, β = 40°.
  const expected = [0.7198463103929543, 0.7499999999999999, -0.2499999999999998];
  const { faradayDepth } = follow(layerScene('cos(phi - 40*pi/180)'), frequencies(5e9), ...ring([0, 10, 100]));
  expected.forEach((value, k) => expect(Math.abs(faradayDepth[k] + amplitude * value)).toBeLessThan(1e-8 * amplitude));
});

test('brightness follows B_⊥: brightest a quarter turn from the pitch', () => {
  // Row 10.PI: B_⊥/B at φ = -20, 70, 0, and the contrast (1/cos i)^{(p+1)/2} for p = 2.6.
  const { I } = follow(layerScene('1'), frequencies(5e9), ...ring([-20, 70, 0]));
  expect(relativeError(I[1] / I[0], 1.2955222104840982)).toBeLessThan(1e-8);
  expect(relativeError(I[2] / I[1], 0.8827482339886769 ** 1.8)).toBeLessThan(1e-8);
});

test('the m = 1 harmonic of RM of an axisymmetric disc peaks at p + 180° for B_φ > 0, within 1.5°', () => {
  // Design/physics.md section 8, last bullet.
  for (const pitch of [-20, -12, 15]) {
    const scene = sceneOf({
      tolerance: 1e-6,
      inclination: 40,
      field: [`{model: axisymmetric-spiral, strength: 6 uG, pitch: ${pitch} deg, radius: 8 kpc, innerRadius: 1 kpc, height: 0.6 kpc, closure: 4 kpc}`],
      electrons: ['{model: sech2-disc, density: 0.03 cm^-3, radius: 10 kpc, height: 0.5 kpc}'],
      layers: ['{model: sech2-disc, normalisation: 1e-5 cm^-3, radius: 8 kpc, height: 0.5 kpc}'],
    });
    const azimuths = Array.from({ length: 24 }, (_, k) => 15 * k);
    const north = azimuths.map((phi) => 5 * Math.cos(phi * deg));
    const east = azimuths.map((phi) => 5 * Math.sin(phi * deg) * Math.cos(40 * deg));
    const spectrum = frequencies(6e9, 6.1e9);
    const result = follow(scene, spectrum, north, east);
    const measured = azimuths.map((_, k) => {
      const turned = 0.5 * (Math.atan2(result.U[k], result.Q[k]) - Math.atan2(result.U[24 + k], result.Q[24 + k]));
      return (turned - Math.PI * Math.round(turned / Math.PI)) / (wavelengthSquared(6e9) - wavelengthSquared(6.1e9));
    });
    const [c, s] = [Math.cos, Math.sin].map((f) => measured.reduce((sum, value, k) => sum + value * f(azimuths[k] * deg), 0));
    const off = Math.atan2(s, c) / deg - (pitch + 180);
    expect(Math.abs(off - 360 * Math.round(off / 360))).toBeLessThan(1.5);
  }
});
