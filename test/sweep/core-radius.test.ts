import { readFileSync } from 'node:fs';
import { expect, test } from 'vitest';
import { follow, frequencies } from '../ray/scenes.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { scenePath } from '../../src/scene/paths.ts';
import { parseSweep } from '../../src/sweep/parse-sweep.ts';

const folder = 'scenes/lantern-wheel';

test('the example varies a core radius that its scene has, and rays follow it at both ends', () => {
  const file = `${folder}/core-radius.sweep.yaml`;
  expect(() => parseSweep(readFileSync(file, 'utf8'), file)).not.toThrow();
  const scene = parseScene(readFileSync(`${folder}/cored-quadrupole.scene.yaml`, 'utf8'), 'cored-quadrupole.scene.yaml');
  const core = scenePath(scene, 'field.halo.core');
  const opposite = [1, 8].map((kpc) => {
    // Approaching and receding at 5 kpc on the major axis, whose position angle is 64 deg.
    const [north, east] = [5 * Math.cos((64 * Math.PI) / 180), 5 * Math.sin((64 * Math.PI) / 180)];
    const { Q, U } = follow(core.set(scene, kpc), frequencies(1.4e9), [north, -north], [east, -east]);
    const [receding, approaching] = [Math.hypot(Q[0], U[0]), Math.hypot(Q[1], U[1])];
    return (approaching - receding) / (approaching + receding);
  });
  // Unresolved turbulence damps the far side of an even field: the core decides how lopsided the disc is.
  expect(Math.abs(opposite[0] - opposite[1])).toBeGreaterThan(0.02);
});
