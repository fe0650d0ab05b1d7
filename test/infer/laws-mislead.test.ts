import { expect, test } from 'vitest';
import { fitLaws } from '../../src/infer/law-fit.ts';
import { originProfiles } from '../../src/measure/origin-profile.ts';
import { laws } from '../../src/measure/laws/index.ts';
import { localBackend } from '../../src/ray/job.ts';
import type { Scene } from '../../src/scene/types.ts';
import { lambda2M2 } from '../../src/sky/wavelength.ts';
import { relativeError } from '../sky/compare.ts';
import { referenceScene } from '../measure/ring-light.ts';
import { slabScene } from '../measure/slab-scene.ts';

/** The fit that users make, of fractions from 1 to 3 GHz with errors of 1e-3, and what lies behind the light. */
async function fitSight(scene: Scene, northKpc: number, eastKpc: number) {
  const frequencies = Array.from({ length: 40 }, (_, k) => 1e9 * (1 + k / 19.5));
  const spectrum = frequencies.map((frequencyHz) => ({ frequencyHz, centreHz: frequencyHz }));
  const bundle = { northKpc: Float64Array.of(northKpc), eastKpc: Float64Array.of(eastKpc) };
  const { I, Q, U } = await localBackend()({ scene, spectrum, bundle });
  const fits = await fitLaws(laws, { lambda2M2: Float64Array.from(frequencies, lambda2M2), q: Q.map((q, k) => q / I[k]), u: U.map((u, k) => u / I[k]), sigma: Q.map(() => 1e-3) });
  const [[layer]] = originProfiles(scene, bundle, [spectrum[0]], [0], 1);
  return { fits, layer };
}

test('a uniform slab in three dimensions is what its law says: the depth of the whole', async () => {
  const { fits, layer } = await fitSight(slabScene(0.02, 1), 0, 0);
  expect(fits[0].law.name).toBe('burn-slab');
  // A spectrum without noise, followed to 1e-4 of its largest.
  expect(relativeError(fits[0].values[2], layer.wholeDepth)).toBeLessThan(1e-3);
  expect(fits[0].chi2).toBeLessThan(1);
});

test("a damped disc with a helical halo misleads one-dimensional laws by many times the fit's errors", async () => {
  const scene = referenceScene('d-damped-helical');
  const { positionAngle, inclination } = scene.galaxy;
  const [cos, sin] = [Math.cos(positionAngle), Math.sin(positionAngle)];
  // 5 kpc out on the approaching half of the major axis: the turbulent slab, the best law of one depth, finds half of it.
  const approaching = await fitSight(scene, -5 * cos, -5 * sin);
  const slab = approaching.fits.find(({ law }) => law.name === 'internal-dispersion');
  expect(approaching.layer.wholeDepth).toBeGreaterThan(65);
  expect(approaching.layer.wholeDepth - (slab?.values[2] ?? NaN)).toBeGreaterThan(20 * (slab?.errors[2] ?? NaN));
  // On the near half of the minor axis a turbulent screen fits to the noise, and gives the depth the wrong sign.
  const across = -5 * Math.cos(inclination);
  const near = await fitSight(scene, -across * sin, across * cos);
  const [screen] = near.fits;
  expect(screen.chi2 / screen.degreesOfFreedom).toBeLessThan(1);
  expect(near.layer.wholeDepth).toBeGreaterThan(10);
  expect(screen.values[2]).toBeLessThan(-4 * screen.errors[2]);
});
