import { describe, expect, test } from 'vitest';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { parsePathValue, scenePath, scenePaths } from '../../src/scene/paths.ts';
import { fullScene, messageOf, referenceText, spoil } from './support.ts';

const scene = parseScene(fullScene.join('\n'), 's.yaml');

describe('reading', () => {
  test.each([
    ['galaxy.distance', 10000, 'kpc', 'Mpc'],
    ['galaxy.inclination', (40 * Math.PI) / 180, 'rad', 'deg'],
    ['galaxy.volume.radius', 15, 'kpc', 'kpc'],
    ['field.halo.strength', 2, 'uG', 'uG'],
    ['field.mine.q', 20, 'uG kpc^2', 'uG kpc^2'],
    ['thermalElectrons.warm.density', 0.03, 'cm^-3', 'cm^-3'],
    ['cosmicRays.index', 2.8, '', ''],
    ['cosmicRays.thick.normalisation', 1e-5, 'cm^-3', 'cm^-3'],
    ['cosmicRays.thick.height', 1.5, 'kpc', 'kpc'],
    ['cosmicRays.thick.heightIndex', 0.25, '', ''],
    ['cosmicRays.thick.heightAt', 1.4e9, 'Hz', 'GHz'],
    ['turbulence.unresolved.rms', 4, 'uG', 'uG'],
    ['observation.beam.major', 15, 'arcsec', 'arcsec'],
    ['observation.noise', 1e-5, 'Jy/beam', 'Jy/beam'],
    ['observation.foreground.depth', 12, 'rad/m^2', 'rad/m^2'],
    ['numerics.seed', 7, '', ''],
  ])('%s is %d %s', (path, value, unit, shownUnit) => {
    const target = scenePath(scene, path);
    expect(target).toMatchObject({ path, unit, shownUnit });
    // Angles carry one rounding.
    expect(Math.abs(target.get() - value)).toBeLessThanOrEqual(4e-16 * Math.abs(value));
    expect(target.meaning).not.toBe('');
  });
});

test('every path reads, writes a copy with only that number changed, and leaves the scene alone', () => {
  const before = JSON.stringify(scene);
  const paths = scenePaths(scene);
  expect(new Set(paths).size).toBe(paths.length);
  for (const path of paths) {
    const target = scenePath(scene, path);
    const old = target.get();
    const next = target.whole ? old + 1 : old * 0.99 + (target.range[0] < 0 ? 1e-3 : 0);
    const changed = target.set(scene, next);
    expect(scenePath(changed, path).get(), path).toBe(next);
    for (const other of paths) if (other !== path) expect(scenePath(changed, other).get(), other).toBe(scenePath(scene, other).get());
    // Back to the old number is the old scene.
    expect(JSON.stringify(scenePath(changed, path).set(changed, old))).toBe(before);
  }
  expect(JSON.stringify(scene)).toBe(before);
});

test('setting a path gives the scene that --set gives', () => {
  const values: readonly (readonly [string, string])[] = [
    ['field.halo.core', '700 pc'], ['galaxy.inclination', '71 deg'], ['galaxy.distance', '20 Mpc'],
    ['cosmicRays.thick.normalisation', '2e-5 cm^-3'], ['observation.beam.minor', '3 arcsec'], ['field.mine.a', '1 pc'],
  ];
  for (const [path, value] of values) {
    const bySet = parseScene(fullScene.join('\n'), 's.yaml', [{ path, value, flag: '--set' }]);
    const target = scenePath(scene, path);
    expect(target.set(scene, parsePathValue(target, scene, value)), path).toEqual(bySet);
  }
});

test('a pixel given in kpc stays so when the distance changes', () => {
  const text = referenceText('a-spiral-quadrupole');
  const near = parseScene(text, 'a.yaml');
  const far = scenePath(near, 'galaxy.distance').set(near, 20000);
  expect(far).toEqual(parseScene(text, 'a.yaml', [{ path: 'galaxy.distance', value: '20 Mpc', flag: '--set' }]));
  expect(far.observation.image.pixelArcsec).toBe(near.observation.image.pixelArcsec / 2);
});

describe('what is refused', () => {
  test.each([
    ['field.hallo.strength', 'unknown path "field.hallo.strength" (did you mean "field.halo.strength"?); known are field.uniform.x, '],
    ['field.halo', 'unknown path "field.halo"'],
    ['galaxy.inklination', 'unknown path "galaxy.inklination" (did you mean "galaxy.inclination"?); known are galaxy.distance, '],
    ['', 'unknown path ""'],
    ['__proto__.x', 'unknown path "__proto__.x"'],
    ['cosmicRays.thick.density', 'unknown path "cosmicRays.thick.density"'],
  ])('%s', (path, start) => expect(messageOf(() => scenePath(scene, path)).slice(0, start.length)).toBe(start));

  test('a path of what the scene leaves out', () => {
    const bare = parseScene(spoil(28, '').replace(/^.*noise:.*$/m, ''), 's.yaml');
    expect(scenePaths(bare).filter((path) => /beam|noise/.test(path))).toEqual([]);
    expect(messageOf(() => scenePath(scene, 'observation.beam.major').set(bare, 3))).toBe('the scene has no "observation.beam.major"');
  });

  test.each([
    ['galaxy.inclination', 4, 'galaxy.inclination: 229.183118052 deg is outside 0 to 180 deg'],
    ['field.halo.strength', Number.NaN, 'field.halo.strength: NaN uG is outside -1000 to 1000 uG'],
    ['cosmicRays.index', 1, 'cosmicRays.index: 1 is not allowed: more than 1 and at most 5'],
    ['numerics.seed', 1.5, 'numerics.seed: 1.5 is not allowed: a whole number, 0 to 1000000000000000'],
    ['observation.beam.minor', 16, 'observation.beam.minor: the minor axis, 16 arcsec, would be larger than the major axis, 15 arcsec'],
  ])('%s set to %d', (path, value, message) => expect(messageOf(() => scenePath(scene, path).set(scene, value))).toBe(message));

  test.each([
    ['field.halo.core', '3 uG', '"3 uG" is a magnetic field: a length is wanted, such as "2 kpc"'],
    ['field.halo.core', 3, '"3" has no unit: a length is wanted, such as "2 kpc"'],
    ['cosmicRays.index', '3 kpc', '"3 kpc" has a unit, but a plain number is wanted'],
    ['field.halo.core', '-1 kpc', 'field.halo.core: -1 kpc is outside 0 to 1000 kpc'],
  ])('%s given as %j', (path, value, message) => {
    expect(messageOf(() => parsePathValue(scenePath(scene, path), scene, value))).toBe(message);
  });

  test('180 deg, the end of the range, is allowed', () => {
    const target = scenePath(scene, 'galaxy.inclination');
    expect(target.set(scene, parsePathValue(target, scene, '180 deg')).galaxy.inclination).toBe(Math.PI);
  });
});
