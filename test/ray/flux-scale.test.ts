import { expect, test } from 'vitest';
import { EngineCache, localBackend } from '../../src/ray/job.ts';
import { probeScene } from '../../src/ray/probe.ts';
import { synchrotronEmissivity } from '../../src/ray/synchrotron.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { scenePath } from '../../src/scene/paths.ts';
import type { Scene } from '../../src/scene/types.ts';
import { parsec } from '../../src/units/constants.ts';
import { relativeError } from '../sky/compare.ts';
import { frequencies } from './scenes.ts';

function sceneOf(field: string, layers: string, more: readonly string[] = [], tolerance = 1e-6, distance = 10): Scene {
  const text = [
    'gyrelight: 1',
    `galaxy: {distance: ${distance} Mpc, inclination: 50 deg, positionAngle: 20 deg, volume: {radius: 10 kpc, height: 2 kpc}}`,
    `field: [${field}]`,
    'thermalElectrons: [{model: exponential-disc, density: 0.03 cm^-3, radius: 10 kpc, height: 1 kpc}]',
    `cosmicRays: {index: 2.8, layers: [${layers}], scaleTo: {flux: 1.2 Jy, at: 1.4 GHz}}`,
    'observation: {image: {pixels: 4, pixel: 1 kpc}, bands: [{name: one, at: [1.4 GHz]}]}',
    `numerics: {tolerance: ${tolerance}}`,
    ...more,
  ];
  return parseScene(text.join('\n'), 'test.yaml');
}

const slab = '{model: slab, normalisation: 3e-5 cm^-3, halfThickness: 1 kpc}';
const sum = (values: Float64Array): number => values.reduce((total, value) => total + value, 0);

test('a uniform slab is scaled to its flux density in closed form', () => {
  const scene = sceneOf('{model: uniform, x: 5 uG, y: 0 uG, z: 0 uG}', slab);
  const { C } = probeScene(scene, { x: Float64Array.of(1), y: Float64Array.of(2), z: Float64Array.of(0.3) });
  // C ε B^1.9 · π R² 2 h / D², kpc and Mpc; ε per cm, and 1 Jy = 1e-23 erg s^-1 cm^-2 Hz^-1.
  const volume = Math.PI * 100 * 2;
  const flux = (C[0] * synchrotronEmissivity(2.8, 1.4e9) * 5 ** 1.9 * (volume / 1e8) * parsec.value * 1e5) / 1e-23;
  expect(relativeError(flux, 1.2)).toBeLessThan(1e-9);
});

const disc = '{model: axisymmetric-spiral, name: disc, strength: 8 uG, pitch: -20 deg, radius: 4 kpc, innerRadius: 1 kpc, height: 0.6 kpc, closure: 4 kpc}';
const halo = '{model: quadrupole-halo, name: halo, strength: 2 uG, core: 3 kpc, reference: 5 kpc}';
const layers = '{model: exponential-disc, name: thick, normalisation: 1e-5 cm^-3, radius: 4 kpc, height: 1 kpc, heightIndex: 0.25, heightAt: 0.4 GHz}, {model: exponential-disc, name: thin, normalisation: 1e-5 cm^-3, radius: 3 kpc, height: 0.2 kpc}';

test('the rays of a whole galaxy sum to the flux density', async () => {
  const scene = sceneOf(`${disc}, ${halo}`, layers, [], 1e-4);
  // Rays at the centres of 0.2 kpc cells: an image that the factor knows nothing of.
  const [side, step] = [130, 0.2];
  const offset = (k: number): number => (k - (side - 1) / 2) * step;
  const bundle = {
    northKpc: Float64Array.from({ length: side * side }, (_, k) => offset(Math.floor(k / side))),
    eastKpc: Float64Array.from({ length: side * side }, (_, k) => offset(k % side)),
  };
  const result = await localBackend(new EngineCache())({ scene, spectrum: frequencies(1.4e9), bundle });
  expect(relativeError(sum(result.I) * (step / 1e4) ** 2, 1.2)).toBeLessThan(2e-3);
});

test('the factor belongs to numbers, not to the structure: it follows every parameter', () => {
  const scene = sceneOf(`${disc}, ${halo}`, layers);
  const C = (at: Scene): number => probeScene(at, { x: Float64Array.of(1), y: Float64Array.of(2), z: Float64Array.of(0.3) }).C[0];
  // A flux ten times larger needs ten times the electrons, twice the distance four times; a common factor is taken out.
  const set = (path: string, factor: number): Scene => {
    const target = scenePath(scene, path);
    return target.set(scene, target.get() * factor);
  };
  expect(relativeError(C(set('cosmicRays.scaleTo.flux', 10)) / C(scene), 10)).toBeLessThan(1e-12);
  expect(relativeError(C(set('galaxy.distance', 2)) / C(scene), 4)).toBeLessThan(1e-12);
  const both = scenePath(scene, 'cosmicRays.thin.normalisation').set(set('cosmicRays.thick.normalisation', 3), 3e-5);
  expect(relativeError(C(both), C(scene))).toBeLessThan(1e-12);
  // Twice the field everywhere emits 2^1.9 times as much.
  const halo2 = scenePath(scene, 'field.halo.strength');
  expect(relativeError(C(halo2.set(set('field.disc.strength', 2), 2 * halo2.get())) / C(scene), 2 ** -1.9)).toBeLessThan(1e-9);
});

test('exact to the tolerance asked, also at a nearly singular centre', () => {
  const sharp = halo.replace('core: 3 kpc', 'core: 0.05 kpc');
  const C = (tolerance: number): number => probeScene(sceneOf(sharp, layers, [], tolerance), { x: Float64Array.of(1), y: Float64Array.of(2), z: Float64Array.of(0.3) }).C[0];
  const exact = C(1e-7);
  for (const tolerance of [1e-3, 1e-4, 1e-5]) expect(relativeError(C(tolerance), exact)).toBeLessThan(tolerance);
});

test('refuses a model that emits nothing', () => {
  const scene = sceneOf('{model: uniform, x: 0 uG, y: 0 uG, z: 0 uG}', slab.replace('3e-5', '0'));
  expect(() => probeScene(scene, { x: Float64Array.of(1), y: Float64Array.of(2), z: Float64Array.of(0.3) })).toThrow(/emits nothing/);
});
