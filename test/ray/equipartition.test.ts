import { expect, test } from 'vitest';
import { equipartitionElectrons } from '../../src/ray/equipartition.ts';
import { measureSymmetry } from '../../src/ray/symmetry.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { scenePath } from '../../src/scene/paths.ts';
import type { Scene } from '../../src/scene/types.ts';
import { electronMass, elementaryCharge, speedOfLight } from '../../src/units/constants.ts';
import { relativeError } from '../sky/compare.ts';
import { follow, frequencies } from './scenes.ts';

interface Parts {
  readonly field: string;
  readonly cosmicRays: string;
  readonly turbulence?: string;
  readonly index?: number;
  readonly inclination?: number;
}

function sceneOf({ field, cosmicRays, turbulence = '', index = 2.6, inclination = 0 }: Parts): Scene {
  const text = [
    'gyrelight: 1',
    `galaxy: {distance: 10 Mpc, inclination: ${inclination} deg, positionAngle: 0 deg, volume: {radius: 10 kpc, height: 0.5 kpc}}`,
    `field: [${field}]`,
    `cosmicRays: {index: ${index}, ${cosmicRays}}`,
    turbulence,
    'observation: {image: {pixels: 4, pixel: 1 kpc}, bands: [{name: one, at: [1.4 GHz]}]}',
    'numerics: {tolerance: 1e-11}',
  ];
  return parseScene(text.join('\n'), 'test.yaml');
}

/** erg s^-1 cm^-2 Hz^-1 sr^-1 of the central ray at 1.4 GHz. */
function brightness(parts: Parts): number {
  return follow(sceneOf(parts), frequencies(1.4e9), [4], [0]).I[0] * 1e-23;
}

const across = '{model: uniform, x: 10 uG, y: 0 uG, z: 0 uG}';
const ratio = 'equipartition: {protonRatio: 100}';

/** Pacholczyk's c1 and c3 and the estimate of B (Beck & Krause 2005, eq. 3), in cgs: the way back. */
function equipartitionField(intensity: number, alpha: number, protonRatio: number, pathCm: number, frequencyHz: number, c4: number): number {
  const [e, m, c] = [10 * speedOfLight.value * elementaryCharge.value, electronMass.value * 1e3, speedOfLight.value * 100];
  const c1 = (3 * e) / (4 * Math.PI * m ** 3 * c ** 5);
  const c3 = (Math.sqrt(3) * e ** 3) / (4 * Math.PI * m * c ** 2);
  // Γ by Lanczos' approximation, apart from the program's own.
  const c2 = 0.25 * c3 * ((alpha + 5 / 3) / (alpha + 1)) * lanczos((3 * alpha + 1) / 6) * lanczos((3 * alpha + 5) / 6);
  const protonErg = 938.27208816 * 1.602176634e-6;
  const numerator = 4 * Math.PI * (2 * alpha + 1) * (protonRatio + 1) * intensity * protonErg ** (1 - 2 * alpha) * (frequencyHz / (2 * c1)) ** alpha;
  return (numerator / ((2 * alpha - 1) * c2 * pathCm * c4)) ** (1 / (alpha + 3)) * 1e6;
}

function lanczos(x: number): number {
  const g = [676.5203681218851, -1259.1392167224028, 771.32342877765313, -176.61502916214059, 12.507343278686905, -0.13857109526572012, 9.9843695780195716e-6, 1.5056327351493116e-7];
  if (x < 0.5) return Math.PI / (Math.sin(Math.PI * x) * lanczos(1 - x));
  const t = x + 6.5;
  const sum = g.reduce((total, value, k) => total + value / (x + k), 0.99999999999980993);
  return Math.sqrt(2 * Math.PI) * t ** (x - 0.5) * Math.exp(-t) * sum;
}

const kpcCm = 3.0856775814913673e21;

test('10 uG give the brightness of checks.json 3.2, and it gives 10 uG back', () => {
  // checks.json 3.2: alpha = 0.8, K0 = 100, 1 kpc, c4 = 1, 1.4 GHz; Beck & Krause 2005 eq. 3, computed with scipy.
  const intensity = brightness({ field: across, cosmicRays: ratio });
  expect(relativeError(intensity, 9.4935857e-19)).toBeLessThan(1e-8);
  expect(relativeError(equipartitionField(intensity, 0.8, 100, kpcCm, 1.4e9, 1), 10)).toBeLessThan(1e-9);
});

// checks.json 3.1: 1 K at 1.4 GHz along 1 kpc.
test.each([[0.6, 9.73508411], [0.8, 8.87101004], [1, 9.25777439]])('alpha = %d: a field of the estimate gives 1 K (checks.json 3.1.*.fac)', (alpha, field) => {
  const intensity = brightness({ field: `{model: uniform, x: ${field} uG, y: 0 uG, z: 0 uG}`, cosmicRays: ratio, index: 2 * alpha + 1 });
  const oneKelvin = (2 * 1.380649e-16 * (1.4e9 / 2.99792458e10) ** 2);
  expect(relativeError(intensity, oneKelvin)).toBeLessThan(1e-7);
});

test.each([[0.6, 3.6], [0.8, 3.8], [1, 4]])('alpha = %d: emissivity grows as B^%d (checks.json 3.3)', (alpha, power) => {
  const at = (field: number): number => brightness({ field: `{model: uniform, x: ${field} uG, y: 0 uG, z: 0 uG}`, cosmicRays: ratio, index: 2 * alpha + 1 });
  expect(relativeError(Math.log(at(8) / at(4)) / Math.log(2), power)).toBeLessThan(1e-12);
});

test('C follows the whole field: the part along the line of sight, 3σ² and the ordered part', () => {
  const intensity = (field: string, turbulence = ''): number => brightness({ field, cosmicRays: ratio, turbulence, index: 3 });
  const tilted = intensity('{model: uniform, x: 6 uG, y: 0 uG, z: 8 uG}');
  // j ∝ B² B_⊥² for p = 3: 100 · 36 against 36 · 36.
  expect(relativeError(tilted / intensity('{model: uniform, x: 6 uG, y: 0 uG, z: 0 uG}'), 100 / 36)).toBeLessThan(1e-12);
  // 36 + 3·4 = 48 in C, 36 + 2·4 in B_⊥².
  const turbulent = intensity('{model: uniform, x: 6 uG, y: 0 uG, z: 0 uG}', 'turbulence: {unresolved: {rms: 2 uG, cell: 0.05 kpc}}');
  expect(relativeError(turbulent / intensity('{model: uniform, x: 6 uG, y: 0 uG, z: 0 uG}'), (48 / 36) * (44 / 36))).toBeLessThan(1e-11);
  const ordered = intensity('{model: uniform, x: 6 uG, y: 0 uG, z: 0 uG}', 'turbulence: {ordered: {rms: 2 uG, along: azimuth, cell: 0.05 kpc}}');
  expect(relativeError(ordered / intensity('{model: uniform, x: 6 uG, y: 0 uG, z: 0 uG}'), (40 / 36) ** 2)).toBeLessThan(1e-9);
});

test('depends on the proton ratio and the index as the energy does', () => {
  expect(relativeError(equipartitionElectrons(2.6, 0) / equipartitionElectrons(2.6, 100), 101)).toBeLessThan(1e-13);
  const scene = sceneOf({ field: across, cosmicRays: ratio });
  const path = scenePath(scene, 'cosmicRays.equipartition.protonRatio');
  expect(path.get()).toBe(100);
  const seen = (at: Scene): number => follow(at, frequencies(1.4e9), [0], [0]).I[0];
  expect(relativeError(seen(path.set(scene, 0)) / seen(scene), 101)).toBeLessThan(1e-12);
});

test('a field of mixed parity makes the electrons uneven', () => {
  const halos = '{model: dipole-halo, strength: 2 uG, core: 2 kpc, reference: 5 kpc}, {model: quadrupole-halo, strength: 2 uG, core: 2 kpc, reference: 5 kpc}';
  expect(measureSymmetry(sceneOf({ field: halos, cosmicRays: ratio })).evenDensities).toBe(false);
  expect(measureSymmetry(sceneOf({ field: halos.split(', {')[0], cosmicRays: ratio })).evenDensities).toBe(true);
});

test.each([
  [{ index: 2 }, ratio, /index 2 is too flat for equipartition/],
  [{}, `${ratio}, scaleTo: {flux: 1 Jy, at: 1.4 GHz}`, /leaves no factor free/],
  [{}, `${ratio}, layers: [{model: slab, normalisation: 1e-5 cm^-3, halfThickness: 1 kpc}]`, /"layers" and "equipartition" are given/],
  [{}, 'scaleTo: {flux: 1 Jy, at: 1.4 GHz}', /"layers" or "equipartition" is missing/],
  [{}, 'equipartition: {protonRatio: -1}', /protonRatio.*-1/],
])('refuses %o %s', (more, cosmicRays, message) => {
  expect(() => sceneOf({ field: across, cosmicRays, ...more })).toThrow(message);
});

test('refuses to vary the index to where there is no equipartition', () => {
  const scene = sceneOf({ field: across, cosmicRays: ratio });
  expect(() => scenePath(scene, 'cosmicRays.index').set(scene, 1.9)).toThrow(/too flat/);
});
