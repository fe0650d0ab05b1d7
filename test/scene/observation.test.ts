import { expect, test } from 'vitest';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { scenePath } from '../../src/scene/paths.ts';
import { relativeError } from '../sky/compare.ts';
import type { Scene } from '../../src/scene/types.ts';

function scene(observation: string): Scene {
  return parseScene(
    `gyrelight: 1
galaxy: {distance: 10 Mpc, inclination: 38 deg, positionAngle: 0 deg, volume: {radius: 15 kpc, height: 6 kpc}}
cosmicRays: {index: 2.8, layers: [{model: exponential-disc, normalisation: 1e-5 cm^-3, radius: 8 kpc, height: 1 kpc}]}
observation:
  image: {pixels: 21, pixel: 1 kpc}
  beam: {major: 60 arcsec, minor: 60 arcsec}
${observation}`,
    'test.scene.yaml',
  );
}

const bands = '  bands: [{name: all, at: [1.4 GHz]}]\n';

test('a band may state its own noise', () => {
  const { observation } = scene('  noise: 10 uJy/beam\n  bands: [{name: L, at: [1.4 GHz], noise: 20 uJy/beam}, {name: C, at: [4.8 GHz]}]\n');
  expect(relativeError(observation.bands[0].noise ?? NaN, 20e-6)).toBeLessThan(1e-12);
  expect(observation.bands[1].noise).toBeUndefined();
  expect(() => scene('  bands: [{name: L, at: [1.4 GHz], noise: 20 Jy/sr}]\n')).toThrow(/test.scene.yaml:7:43: .*there is a beam/);
});

test('the foreground has a gradient over the sky or per kpc, and a random screen', () => {
  const { observation } = scene(`${bands}  foreground: {depth: 12 rad/m^2, gradient: {amount: 3 rad/m^2/arcmin, angle: 90 deg}, random: {rms: 5 rad/m^2, scale: 100 arcsec}}\n`);
  expect(observation.foregroundDepth).toBe(12);
  expect(relativeError(observation.foregroundGradient?.radM2PerArcsec ?? NaN, 0.05)).toBeLessThan(1e-12);
  expect(observation.foregroundScreen).toEqual({ rmsRadM2: 5, scaleArcsec: 100 });
  const linear = scene(`${bands}  foreground: {gradient: {amount: 2 rad/m^2/kpc, angle: 0 deg}}\n`);
  // At 10 Mpc one arcsec is 0.0484813681 kpc.
  expect(relativeError(linear.observation.foregroundGradient?.radM2PerArcsec ?? NaN, 2 * 0.04848136811095360)).toBeLessThan(1e-12);
  const nearer = scenePath(linear, 'galaxy.distance').set(linear, 5000);
  expect(relativeError(nearer.observation.foregroundGradient?.radM2PerArcsec ?? NaN, 0.04848136811095360)).toBeLessThan(1e-12);
  const path = scenePath(linear, 'observation.foreground.gradient.amount');
  expect(path.get()).toBe(2);
  expect(relativeError(path.set(linear, 4).observation.foregroundGradient?.radM2PerArcsec ?? NaN, 4 * 0.04848136811095360)).toBeLessThan(1e-12);
  expect(() => scene(`${bands}  foreground: {gradient: {amount: 2 rad/m^2, angle: 0 deg}}\n`)).toThrow(/rad\/m\^2\/arcmin/);
});

test('missing spacings are a number of wavelengths or the angle of one period', () => {
  expect(scene(`${bands}  shortSpacings: {missingBelow: 500}\n`).observation.missingWavelengths).toBe(500);
  const angular = scene(`${bands}  shortSpacings: {missingBelow: 300 arcsec}\n`).observation.missingWavelengths;
  expect(relativeError(angular ?? NaN, 206264.80624709636 / 300)).toBeLessThan(1e-12);
  expect(() => scene(`${bands}  shortSpacings: {missingBelow: 40 m}\n`)).toThrow(/missingBelow/);
  expect(() => scene(`${bands}  shortSpacings: {missingBelow: -4}\n`)).toThrow(/-4/);
  expect(() => scene(`${bands}  shortSpacings: {}\n`)).toThrow(/missing/);
});
