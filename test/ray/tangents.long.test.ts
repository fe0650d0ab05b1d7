import { test } from 'vitest';
import { randomScene } from './random-scene.ts';
import { sceneOf } from './scenes.ts';
import { checkAgainstDifferences } from './tangent-check.ts';
import { findTangentParameter } from '../../src/ray/tangent-parameters.ts';
import { scenePaths } from '../../src/scene/paths.ts';

test('derivatives of an ordered random field', () => {
  const scene = sceneOf({
    tolerance: 1e-9, inclination: 50, positionAngle: 30, radius: 14, height: 5,
    field: ['{model: uniform, name: even, x: 2 uG, y: -1 uG, z: 1 uG}'],
    layers: ['{model: sech2-disc, name: cosmic, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1 kpc}'],
    more: ['turbulence: {ordered: {rms: 3 uG, along: pitch, pitch: -20 deg, cell: 0.1 kpc}}'],
  });
  checkAgainstDifferences(scene, ['turbulence.ordered.rms', 'turbulence.ordered.cell', 'turbulence.ordered.pitch', 'field.even.x']);
});

test.each(Array.from({ length: 20 }, (_, number) => number))('derivatives of random scene %i by all its numbers', (number) => {
  const scene = sceneOf(randomScene(number, 1e-10).parts);
  // The position angle wraps, and steps are shares of a number's size.
  checkAgainstDifferences(scene, scenePaths(scene).filter((path) => findTangentParameter(scene, path) !== undefined), 5e-4);
});
