import { parseScene } from '../../src/scene/parse-scene.ts';
import type { Scene } from '../../src/scene/types.ts';

/** A uniform slab of half thickness 1 kpc, B = (3, 0, along) uG, n_e in cm^-3. */
export function slabScene(electrons: number, along: number, inclinationDeg = 0): Scene {
  return parseScene(
    `gyrelight: 1
galaxy: {distance: 10 Mpc, inclination: ${inclinationDeg} deg, positionAngle: 0 deg, volume: {radius: 20 kpc, height: 2 kpc}}
field: [{model: uniform, x: 3 uG, y: 0 uG, z: ${along} uG}]
thermalElectrons: [{model: slab, density: ${electrons} cm^-3, halfThickness: 1 kpc}]
cosmicRays: {index: 3, layers: [{model: slab, normalisation: 1e-5 cm^-3, halfThickness: 1 kpc}]}
observation: {image: {pixels: 3, pixel: 1 kpc}, bands: [{name: L, at: [1.4 GHz]}]}
`,
    'slab.scene.yaml',
  );
}
