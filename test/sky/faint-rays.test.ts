import { readFileSync } from 'node:fs';
import { expect, test } from 'vitest';
import { localBackend } from '../../src/ray/job.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { observe } from '../../src/sky/observe.ts';

// Reference scene b has rays at the edge of the volume a million times fainter than its centre.
test('heights of origin of faint rays are those of a far smaller tolerance, to 1e-3 kpc', async () => {
  const file = 'test/reference/b-bisymmetric-clockwise.yaml';
  const text = readFileSync(file, 'utf8');
  const heights = async (tolerance: string): Promise<Float64Array> => {
    const scene = parseScene(text, file, [{ path: 'numerics.tolerance', value: tolerance, flag: 'test' }]);
    return (await observe(scene, localBackend())).origins[0].heightKpc;
  };
  const [usual, exact] = [await heights('1e-4'), await heights('1e-9')];
  let [largest, compared] = [0, 0];
  usual.forEach((value, k) => {
    if (!Number.isFinite(value) || !Number.isFinite(exact[k])) return;
    compared++;
    largest = Math.max(largest, Math.abs(value - exact[k]));
  });
  expect(compared).toBeGreaterThan(800);
  expect(largest).toBeLessThan(1e-3);
});
