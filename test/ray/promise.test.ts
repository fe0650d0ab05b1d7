import { expect, test } from 'vitest';
import { largestMiss } from './dense.ts';
import { randomScene } from './random-scene.ts';
import { follow, frequencies, sceneOf, type SceneParts } from './scenes.ts';

// The numerical promise of design/physics.md section 3, against brute force that never looks at
// the integrand. promise.long.test.ts tries hundreds of scenes.

const spiral = '{model: axisymmetric-spiral, strength: 8 uG, pitch: -20 deg, radius: 8 kpc, innerRadius: 1 kpc, height: 0.6 kpc, closure: 4 kpc}';
const disc = (height: number, density = 0.03): string => `{model: exponential-disc, name: e, density: ${density} cm^-3, radius: 10 kpc, height: ${height} kpc}`;
const layer = (height: number, model = 'exponential-disc'): string => `{model: ${model}, name: c, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: ${height} kpc}`;

test.each(Array.from({ length: 6 }, (_, k) => k))('random scene %i keeps the default tolerance', (number) => {
  const { parts, rays, hertz } = randomScene(number, 1e-4, 6);
  const scene = sceneOf(parts);
  const miss = largestMiss(scene, frequencies(...hertz), rays, follow(scene, frequencies(...hertz), ...rays));
  expect(miss.error, `ray ${miss.ray} at ${miss.frequencyHz} Hz of ${JSON.stringify(parts)}`).toBeLessThan(1e-4);
  expect(miss.unsettled).toBeLessThan(3);
});

const north = [0, 0.3, -2.7, 9.5];
const east = [0, -0.2, 4.2, 1.4];

test.each<[string, SceneParts, readonly number[], number]>([
  ['layers of 50 pc in a volume of 10 kpc', { height: 10, inclination: 40, field: [spiral], electrons: [disc(0.05, 0.3)], layers: [layer(0.05, 'gaussian-disc')] }, [0.35e9, 1.4e9, 4.8e9], 0.02],
  [
    'an azimuthal layer of 50 pc far from the plane',
    { height: 10, inclination: 40, field: ['{model: uniform, x: 0 uG, y: 0 uG, z: 2 uG}', '{model: toroidal-halo, strength: 8 uG, radius: 7 kpc, innerRadius: 1 kpc, peakHeight: 2.5 kpc, width: 0.05 kpc}'], electrons: [disc(1)], layers: [layer(3)] },
    [0.35e9, 1.4e9, 4.8e9],
    0.02,
  ],
  ['middle frequencies where turbulence hides the far side from the longest', { inclination: 60, field: [spiral, '{model: quadrupole-halo, strength: 2 uG, core: 1 kpc, reference: 5 kpc}'], layers: [layer(1.5)], turbulence: '{rms: 4 uG, cell: 0.05 kpc}', tolerance: 1e-7 }, [0.35e9, 1.4e9, 4.8e9], 0.03],
  ['strong turbulence at 0.15 GHz', { inclination: 40, field: [spiral], layers: [layer(1.5)], turbulence: '{rms: 10 uG, cell: 0.05 kpc}' }, [0.15e9, 1.4e9], 0.02],
  ['a sharp sheet and tube written by a user', { inclination: 30, field: [spiral, '{model: formula, name: f, parameters: {w: 0.02 kpc}, field: {phi: "3*tanh((z - 1.3)/w)*exp(-((r - 5)/(4*w))^2)"}}'], layers: [layer(1.5)] }, [0.35e9, 1.4e9, 4.8e9], 0.02],
  ['i = 89.9° with a thin disc', { inclination: 89.9, field: [spiral], electrons: [disc(0.2, 0.1)], layers: [layer(0.3)] }, [1.4e9, 4.8e9], 0.03],
])('%s', (_, parts, hertz, panelKpc) => {
  const tolerance = parts.tolerance ?? 1e-4;
  const scene = sceneOf(parts);
  const spectrum = frequencies(...hertz);
  const miss = largestMiss(scene, spectrum, [north, east], follow(scene, spectrum, north, east), { panelKpc, settled: 0.1 * tolerance });
  expect(miss.error, `ray ${miss.ray} at ${miss.frequencyHz} Hz`).toBeLessThan(tolerance);
  expect(miss.unsettled).toBe(0);
});

test('arms seen from the side, met in step by the panels of a long ray, keep the tolerance', () => {
  // Found among random scenes: with panels allowed three times as much, ray 19 missed by three times the tolerance.
  // Beside a run at 1e-8, which the tests above and test/reference hold to outside values.
  const { parts, rays, hertz } = randomScene(1031, 1e-4, 24);
  const spectrum = frequencies(...hertz);
  const [result, exact] = [1e-4, 1e-8].map((tolerance) => follow(sceneOf({ ...parts, tolerance }), spectrum, ...rays));
  hertz.forEach((_, k) => {
    const size = (ray: number): number => Math.hypot(exact.Q[24 * k + ray], exact.U[24 * k + ray]);
    const all = Array.from({ length: 24 }, (_, ray) => ray);
    const scale = Math.max(...all.map(size), 1e-3 * Math.max(...exact.I.subarray(24 * k, 24 * k + 24)));
    for (const ray of all) expect(Math.hypot(result.Q[24 * k + ray] - exact.Q[24 * k + ray], result.U[24 * k + ray] - exact.U[24 * k + ray]) / scale, `ray ${ray}`).toBeLessThan(1e-4);
  });
});
