import { describe, expect, it } from 'vitest';
import type { GridArray, GridSource } from '../../src/field/grid-file.ts';
import { measureDivergence, probeScene, randomPoints } from '../../src/ray/probe.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { scenePath } from '../../src/scene/paths.ts';
import type { Scene } from '../../src/scene/types.ts';

/** A_phi (uG kpc) and B_phi (uG), odd in r, and the poloidal field worked out by hand. */
const potential = (r: number, z: number): number => 3 * r * z * Math.exp(-(r * r) / 20 - (z * z) / 5);
const azimuthal = (r: number, z: number): number => 2 * r * Math.exp(-(r * r) / 20) * Math.cos(z / 2);
const radial = (r: number, z: number): number => -3 * r * (1 - (2 * z * z) / 5) * Math.exp(-(r * r) / 20 - (z * z) / 5);
const vertical = (r: number, z: number): number => 3 * z * (2 - (r * r) / 10) * Math.exp(-(r * r) / 20 - (z * z) / 5);

const [radii, heights, dr, dz] = [41, 61, 0.25, 0.1];

function image(name: string, unit: string, f: (r: number, z: number) => number, keywords: Readonly<Record<string, string | number>> = {}): GridArray {
  const values = Float64Array.from({ length: radii * heights }, (_, k) => f((k % radii) * dr, (Math.floor(k / radii) - 30) * dz));
  const cards = { BUNIT: unit, CUNIT1: 'kpc', CRPIX1: 1, CRVAL1: 0, CDELT1: dr, CUNIT2: 'kpc', CRPIX2: 1, CRVAL2: -3, CDELT2: dz, ...keywords };
  return { name, shape: [heights, radii], values, keywords: new Map(Object.entries(cards)) };
}

const good = [image('A_PHI', 'uG kpc', potential), image('B_PHI', 'uG', azimuthal)];
const source = (arrays: readonly GridArray[]): GridSource => () => ({ arrays, sha256: 'sum' });

function read(component: string, arrays = good, volume = '{radius: 9 kpc, height: 2.5 kpc}'): Scene {
  return parseScene(
    `gyrelight: 1
galaxy: {distance: 10 Mpc, inclination: 50 deg, positionAngle: 20 deg, volume: ${volume}}
field: [${component}]
cosmicRays: {index: 2.8, layers: [{model: gaussian-disc, normalisation: 1e-5 cm^-3, radius: 4 kpc, height: 1 kpc}]}
observation: {image: {pixels: 8, pixel: 1 kpc}, bands: [{name: L, at: [1.4 GHz]}]}
`,
    'a.scene.yaml',
    [],
    source(arrays),
  );
}

const solved = '{model: mean-field, name: solved, file: field.fits}';

describe('the model mean-field', () => {
  it('is the curl of the potential and the azimuthal field of its file, on the axis too', () => {
    const scene = read(solved);
    // Random points of the volume, and two on the axis.
    const { x, y, z } = randomPoints(scene, 300);
    x.set([0, 1e-9]);
    y.set([0, 0]);
    const { Bx, By, Bz } = probeScene(scene, { x, y, z });
    z.forEach((height, k) => {
      const r = Math.hypot(x[k], y[k]);
      const [cos, sin] = r > 0 ? [x[k] / r, y[k] / r] : [1, 0];
      const [inward, along] = [radial(r, height), azimuthal(r, height)];
      const expected = [inward * cos - along * sin, inward * sin + along * cos, vertical(r, height)];
      // Slopes of cubic splines: third order in the step, 0.25 kpc against scales of 3 kpc.
      [Bx[k], By[k], Bz[k]].forEach((value, axis) => expect(Math.abs(value - expected[axis])).toBeLessThan(6e-3));
    });
  });

  it('has no divergence after interpolation', () => {
    const [{ largest, byConstruction }] = measureDivergence(read(solved));
    expect(byConstruction).toBe(true);
    // Asked for is 1e-6.
    expect(largest).toBeLessThan(1e-12);
  });

  it('scales with its strength, which paths address', () => {
    const path = scenePath(read(solved), 'field.solved.strength');
    const strongest = azimuthal(3.25, 0);
    const scene = read(solved);
    expect(Math.abs((path.get()) / strongest - 1)).toBeLessThan(1e-12);
    const fieldOf = (one: Scene): readonly number[] => {
      const { Bx, By, Bz } = probeScene(one, { x: Float64Array.of(3), y: Float64Array.of(1), z: Float64Array.of(0.5) });
      return [Bx[0], By[0], Bz[0]];
    };
    const before = fieldOf(scene);
    fieldOf(path.set(scene, -2 * strongest)).forEach((value, axis) => expect(Math.abs(value + 2 * before[axis])).toBeLessThan(1e-12 * strongest));
    const given = fieldOf(read('{model: mean-field, name: solved, file: field.fits, strength: 4 uG}'));
    given.forEach((value, axis) => expect(Math.abs(value - (4 / strongest) * before[axis])).toBeLessThan(1e-12 * strongest));
  });

  it.each([
    [good, '{radius: 11 kpc, height: 2 kpc}', /field\.fits reaches to r = 10\.00 kpc and \|z\| = 3\.000 kpc and does not cover the scene's volume, 11 kpc and 2 kpc/],
    [good, '{radius: 5 kpc, height: 3.5 kpc}', /does not cover/],
    [[good[0]], undefined, /field\.fits has no image "B_PHI"; a field file of "gyrelight dynamo" is wanted/],
    [[good[0], image('B_PHI', 'G', azimuthal)], undefined, /B_PHI has BUNIT = G; uG is wanted/],
    [[image('A_PHI', 'uG kpc', potential, { CUNIT2: 'pc' }), good[1]], undefined, /CUNIT2 = pc; kpc is wanted/],
    [[image('A_PHI', 'uG kpc', potential, { CRVAL1: 0.125 }), good[1]], undefined, /its first radius is 0\.125 kpc; it must be 0/],
    [[good[0], image('B_PHI', 'uG', () => 0)], undefined, /B_PHI is 0 everywhere/],
    [[image('A_PHI', 'uG kpc', (r) => (r > 4 ? NaN : r)), good[1]], undefined, /A_PHI is NaN at radius 17 and height 0/],
  ])('refuses a file that does not fit (%#)', (arrays, volume, message) => {
    expect(() => read(solved, arrays, volume)).toThrow(message);
    expect(() => read(solved, arrays, volume)).toThrow(/a\.scene\.yaml:3:/);
  });
});
