import { describe, expect, it } from 'vitest';
import { measureDivergence, probeScene, randomPoints } from '../../src/ray/probe.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import type { Scene } from '../../src/scene/types.ts';

function read(component: string, volume = '{radius: 12 kpc, height: 6 kpc}'): Scene {
  return parseScene(
    `gyrelight: 1
galaxy: {distance: 10 Mpc, inclination: 50 deg, positionAngle: 20 deg, volume: ${volume}}
field: [${component}]
cosmicRays: {index: 2.8, layers: [{model: gaussian-disc, normalisation: 1e-5 cm^-3, radius: 4 kpc, height: 1 kpc}]}
observation: {image: {pixels: 8, pixel: 1 kpc}, bands: [{name: L, at: [1.4 GHz]}]}
`,
    'a.scene.yaml',
  );
}

const flux = 'strength: 1.5 uG, radius: 6 kpc, smoothing: 0.8 kpc, winding: 0.05 kpc^-1';
const rowsOf = (radii: readonly number[], tangent: (r: number) => number): string =>
  `[${radii.map((r) => `[${r} kpc, ${(Math.atan(tangent(r)) * 180) / Math.PI} deg]`).join(', ')}]`;
const tabulated = (opening: string, more = 'parity: odd'): string => `{model: tabulated-flare-halo, ${flux}, ${more}, opening: ${opening}}`;

function largestDifference(a: Scene, b: Scene): number {
  const { x, y, z } = randomPoints(a, 400);
  x.set([0, 1e-9]);
  y.set([0, 0]);
  const [one, other] = [a, b].map((scene) => probeScene(scene, { x, y, z }));
  let largest = 0;
  for (const key of ['Bx', 'By', 'Bz'] as const) one[key].forEach((value, k) => (largest = Math.max(largest, Math.abs(value - other[key][k]))));
  return largest;
}

describe('the model tabulated-flare-halo', () => {
  it.each(['parity: odd', 'parity: even', 'parity: even, flux: closed'])('with a linear table is linear-flare-halo, %s', (more) => {
    // A natural spline through a straight line is that line; what is left is the grid of r_0, in uG of up to 20.
    const linear = `{model: linear-flare-halo, ${flux}, ${more}, openingAngle: 40 deg, reference: 6 kpc}`;
    const table = tabulated(rowsOf([2, 5, 12], (r) => (Math.tan((40 * Math.PI) / 180) * r) / 6), more);
    expect(largestDifference(read(table), read(linear))).toBeLessThan(1e-4);
  });

  it('with a fine table of the saturating law is helical-halo', () => {
    const helical = `{model: helical-halo, strength: 1.5 uG, radius: 6 kpc, smoothing: 0.8 kpc, parity: odd, openingAngle: 55 deg, turnover: 3 kpc, turnHeight: 20 kpc}`;
    const radii = Array.from({ length: 97 }, (_, k) => (k + 1) * 0.125);
    const table = tabulated(rowsOf(radii, (r) => (Math.tan((55 * Math.PI) / 180) * r) / (r + 3)));
    // The spline is odd in r_0, the law not: T'' jumps on the axis, which costs T' there 2 % of itself and B_z twice that.
    expect(largestDifference(read(table), read(helical))).toBeLessThan(0.015);
  });

  it('has no divergence where the law bends, and may bend back', () => {
    for (const more of ['parity: odd', 'parity: even']) {
      const [{ largest, byConstruction }] = measureDivergence(read(tabulated('[[0 kpc, 0 deg], [2 kpc, 20 deg], [5 kpc, 50 deg], [9 kpc, 40 deg], [14 kpc, 35 deg]]', more)));
      expect(byConstruction).toBe(true);
      expect(largest).toBeLessThan(1e-6);
    }
  });

  it.each([
    ['[[2 kpc, 60 deg], [3 kpc, 10 deg], [12 kpc, 10 deg]]', /lines that leave the plane near 2\.\d+ kpc cross at a height of 0\.\d+ kpc, within the volume's 6 kpc/],
    ['[[2 kpc, 60 deg], [3 kpc, 60 deg]]', /ends at 3 kpc, within the volume's radius of 12 kpc/],
    ['[[3 kpc, 20 deg], [2 kpc, 30 deg], [12 kpc, 30 deg]]', /2 kpc follows 3 kpc/],
    ['[[0 kpc, 10 deg], [5 kpc, 30 deg], [12 kpc, 30 deg]]', /the angle at 0 kpc is 0 deg/],
    ['[[0 kpc, 0 deg], [12 kpc, 30 deg]]', /at least two rows/],
    ['[[5 kpc, 0 deg], [6 kpc, 60 deg], [12 kpc, 70 deg]]', /turns inward, to below 0 deg|cross/],
    ['[[5 kpc, 95 deg], [12 kpc, 30 deg]]', /95 deg/],
    ['[[5 kpc], [12 kpc, 30 deg]]', /a radius and an angle/],
  ])('refuses %s', (opening, reason) => {
    expect(() => read(tabulated(opening))).toThrow(reason);
  });

  it('is no density', () => {
    expect(() => read('{model: uniform, x: 1 uG, y: 0 uG, z: 0 uG}]\nthermalElectrons: [{model: tabulated-flare-halo}')).toThrow('is a field, but a density is wanted');
  });
});
