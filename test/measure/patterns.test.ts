import { expect, test } from 'vitest';
import type { HarmonicFit } from '../../src/measure/harmonics.ts';
import { relativeError } from '../sky/compare.ts';
import { beamHarmonicsP, referenceScene, ringHarmonicsP, ringHarmonicsRm } from './ring-light.ts';

const degrees = 180 / Math.PI;
const share = (fit: HarmonicFit, order: number): number => fit.harmonics[order - 1].amplitude / Math.abs(fit.mean);
/** Difference of two angles, deg, in (-180, 180]. */
const apart = (a: number, b: number): number => ((((a - b) % 360) + 540) % 360) - 180;

/** An axisymmetric spiral alone: scene a without its halo. */
const spiral = (inclination: number, pitch: number, strength = 8) =>
  referenceScene('a-spiral-quadrupole', {
    'galaxy.inclination': `${inclination} deg`,
    'field.axisymmetric-spiral.pitch': `${pitch} deg`,
    'field.axisymmetric-spiral.strength': `${strength} uG`,
    'field.quadrupole-halo.strength': '0 uG',
  });

test('the m = 1 harmonic of RM of an axisymmetric spiral peaks at the pitch angle + 180 deg, at several inclinations', async () => {
  // Common practice; Krause 1990. B_phi > 0: p + 180 deg; reversed: p.
  for (const [inclination, pitch, strength] of [[20, -20, 8], [40, -20, 8], [60, -20, 8], [40, -35, 8], [40, 15, 8], [40, -20, -8], [140, -20, 8]]) {
    const fit = await ringHarmonicsRm(spiral(inclination, pitch, strength), 5);
    const expected = strength > 0 ? pitch + 180 : pitch;
    expect(Math.abs(apart(fit.harmonics[0].phase * degrees, expected)), `i ${inclination}, p ${pitch}`).toBeLessThan(1.5);
    // One sine a turn: nothing else but the little that the closing lines of the field add.
    expect(fit.harmonics[1].amplitude / fit.harmonics[0].amplitude).toBeLessThan(0.1);
  }
});

test('a bisymmetric field shows m = 2', async () => {
  for (const inclination of [30, 50]) {
    const scene = referenceScene('b-bisymmetric-clockwise', { 'galaxy.inclination': `${inclination} deg` });
    const bare = { ...scene, field: scene.field.filter(({ model }) => model.name === 'spiral-mode') };
    expect(bare.field.length).toBe(1);
    const fit = await ringHarmonicsRm(bare, 5);
    const [one, two, three] = fit.harmonics.map(({ amplitude }) => amplitude);
    expect(two).toBeGreaterThan(3 * Math.max(one, three));
  }
});

test('an even field without damping makes no m = 1 of P; the beam makes one that grows', async () => {
  // design/physics.md section 8: exact without a beam; scene a on the 5 kpc ring gives 0.10, 0.43, 0.62 for 1, 2, 3 kpc.
  const scene = referenceScene('a-spiral-quadrupole', { 'numerics.tolerance': '1e-6' });
  const bare = { ...scene, turbulence: {} };
  expect(share(await ringHarmonicsP(bare, 5, 1.4e9), 1)).toBeLessThan(1e-4);
  const beams = [1, 2, 3];
  const seen: number[] = [];
  for (const beam of beams) seen.push(share(await beamHarmonicsP({ ...bare, numerics: { ...scene.numerics, tolerance: 1e-4 } }, 5, beam, 1.4e9), 1));
  // Sectors 1 kpc wide here, a line of 5 kpc there.
  [0.1, 0.43, 0.62].forEach((expected, k) => expect(Math.abs(seen[k] - expected), `${beams[k]} kpc: ${seen[k]}`).toBeLessThan(0.08));
  expect(seen[0]).toBeLessThan(seen[1]);
  expect(seen[1]).toBeLessThan(seen[2]);
});

test('P at 20 cm is strongest towards the approaching end, and even at 6 cm: a turbulent disc with an even helical halo', async () => {
  // A fact of the trade (common practice). Scene d; values of the separate slow program in /reference: 0.479 at 210 deg, 0.001.
  const scene = referenceScene('d-damped-helical');
  const long = await ringHarmonicsP(scene, 5, 1.4e9);
  expect(Math.abs(apart(long.harmonics[0].phase * degrees, 180))).toBeLessThan(40);
  expect(share(long, 1)).toBeGreaterThan(0.3);
  // 36 points, tolerance 1e-4 of the largest P of few rays.
  expect(relativeError(share(long, 1), 0.479)).toBeLessThan(0.01);
  expect(Math.abs(apart(long.harmonics[0].phase * degrees, 210))).toBeLessThan(1);
  expect(share(await ringHarmonicsP(scene, 5, 4.8e9), 1)).toBeLessThan(0.02);
});

test('a beam of 1 kpc leaves that asymmetry as it is; one of 3 kpc adds its own and turns it by 30 deg', async () => {
  const scene = referenceScene('d-damped-helical');
  const near = { long: await beamHarmonicsP(scene, 5, 1, 1.4e9), short: await beamHarmonicsP(scene, 5, 1, 4.8e9) };
  expect(Math.abs(apart(near.long.harmonics[0].phase * degrees, 180))).toBeLessThan(40);
  expect(Math.abs(share(near.long, 1) - 0.48)).toBeLessThan(0.05);
  expect(share(near.short, 1)).toBeLessThan(0.02);
  const wide = { long: await beamHarmonicsP(scene, 5, 3, 1.4e9), short: await beamHarmonicsP(scene, 5, 3, 4.8e9) };
  // No longer within 40 deg, and no longer gone at 6 cm: the beam's own asymmetry (design/physics.md section 8).
  expect(share(wide.long, 1)).toBeGreaterThan(share(near.long, 1));
  expect(Math.abs(apart(wide.long.harmonics[0].phase * degrees, 238))).toBeLessThan(5);
  expect(share(wide.short, 1)).toBeGreaterThan(0.02);
  expect(share(wide.short, 1)).toBeLessThan(0.1);
});
