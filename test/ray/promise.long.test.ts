import { expect, test } from 'vitest';
import { largestMiss } from './dense.ts';
import { randomScene } from './random-scene.ts';
import { follow, frequencies, sceneOf } from './scenes.ts';

test.each([1e-4, 1e-6])('two hundred random scenes keep a tolerance of %d', (tolerance) => {
  const failures: string[] = [];
  let worst = 0;
  for (let number = 0; number < 200; number++) {
    const { parts, rays, hertz } = randomScene(number, tolerance, 25);
    const scene = sceneOf(parts);
    const spectrum = frequencies(...hertz);
    const miss = largestMiss(scene, spectrum, rays, follow(scene, spectrum, ...rays), { settled: 0.02 * tolerance });
    worst = Math.max(worst, miss.error);
    if (!(miss.error < tolerance)) failures.push(`scene ${number}, ray ${miss.ray} at ${miss.frequencyHz} Hz: ${miss.error / tolerance} times the tolerance`);
  }
  console.log(`largest error at a tolerance of ${tolerance}: ${worst}`);
  expect(failures).toEqual([]);
});
