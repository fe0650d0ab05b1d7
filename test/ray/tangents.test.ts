import { expect, test } from 'vitest';
import { modelLibrary } from '../../src/model/library.ts';
import type { Model } from '../../src/model/types.ts';
import { findTangentParameter } from '../../src/ray/tangent-parameters.ts';
import { splitPaths } from '../../src/ray/tangent-surfaces.ts';
import { scenePath, scenePaths } from '../../src/scene/paths.ts';
import { faradayConstant, speedOfLight } from '../../src/units/constants.ts';
import { frequencies, sceneOf, type SceneParts } from './scenes.ts';
import { checkAgainstDifferences, followTangents, slopesBy } from './tangent-check.ts';

/** Values for every parameter of a model, as its own checks have them. */
function textOf(model: Model, name: string, rename: Record<string, string> = {}): string {
  const size: Record<string, string> = { 'cm^-3': '0.02', uG: '2', deg: '24', kpc: '2.3', 'deg/kpc': '1.5', '': '2', '1/kpc': '0.3' };
  const own: Record<string, string> = { height: '0.9', smoothing: '0.8', innerRadius: '0.7', peakHeight: '1.2', width: '0.6', halfThickness: '0.8', core: '1.7', radius: '6', reference: '5', turnHeight: '7', closure: '3' };
  const parameters = model.parameters.map((parameter) => {
    const unit = parameter.unit;
    return `${rename[parameter.name] ?? parameter.name}: ${own[parameter.name] ?? size[unit] ?? '1.1'}${unit === '' ? '' : ` ${unit}`}`;
  });
  return `{model: ${model.name}, name: ${name}, ${parameters.join(', ')}}`;
}

const base: SceneParts = {
  tolerance: 1e-10, inclination: 50, positionAngle: 30, radius: 14, height: 5,
  field: ['{model: uniform, name: even, x: 2 uG, y: -1 uG, z: 1 uG}'],
  electrons: ['{model: exponential-disc, name: warm, density: 0.03 cm^-3, radius: 10 kpc, height: 1 kpc}'],
  layers: ['{model: sech2-disc, name: cosmic, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1 kpc}'],
  turbulence: '{rms: 2 uG, cell: 0.05 kpc}',
};

const models = [...modelLibrary().values()].map((model) => [model.name, model] as const);

test.each(models)('derivatives by every parameter of %s are those of central differences', (_name, model) => {
  const uses: SceneParts[] = model.kind === 'field'
    ? [{ ...base, field: [...base.field, textOf(model, 'tested')] }]
    : [
        { ...base, electrons: [...base.electrons!, textOf(model, 'tested')] },
        { ...base, layers: [...base.layers, textOf(model, 'tested', { density: 'normalisation' })] },
      ];
  for (const parts of uses) {
    const scene = sceneOf(parts);
    const paths = scenePaths(scene).filter((path) => path.includes('.tested.') && !scenePath(scene, path).whole);
    for (const path of paths) expect(findTangentParameter(scene, path), path).toBeDefined();
    checkAgainstDifferences(scene, paths);
  }
});

const geometry = ['galaxy.inclination', 'galaxy.positionAngle', 'galaxy.distance', 'galaxy.volume.radius', 'galaxy.volume.height', 'cosmicRays.index'];
const slabs: SceneParts = {
  ...base,
  electrons: ['{model: slab, name: warm, density: 0.02 cm^-3, halfThickness: 0.5 kpc}'],
  layers: ['{model: slab, name: cosmic, normalisation: 1e-5 cm^-3, halfThickness: 0.9 kpc}'],
};
const spiral = '{model: axisymmetric-spiral, name: disc, strength: 5 uG, pitch: -20 deg, radius: 8 kpc, innerRadius: 1 kpc, height: 0.8 kpc, closure: 3 kpc}';

test.each([
  ['discs', { ...base, field: [...base.field, spiral] }],
  ['slabs', slabs],
  ['a turned galaxy seen from below', { ...base, inclination: 140, positionAngle: 250, field: [spiral] }],
  ['a galaxy seen from the side, emission up to its rim', { ...slabs, inclination: 84, radius: 7, field: [spiral] }, 1e-3],
  ['layers whose height depends on frequency', { ...base, layers: ['{model: exponential-disc, name: cosmic, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1 kpc, heightIndex: 0.3, heightAt: 1.4 GHz}'] }],
  ['turbulence that follows a field', { ...base, field: [...base.field, spiral], turbulence: '{rms: 4 uG, cell: 0.05 kpc, follows: disc}' }],
  ['no turbulence', { ...base, turbulence: undefined, field: [...base.field, spiral] }],
] as readonly [string, SceneParts, number?][])('derivatives of %s by how it is turned, bounded and lit', (_name, parts, step) => {
  const scene = sceneOf(parts);
  const others = scenePaths(scene).filter((path) => /turbulence|height(Index|At)?$|halfThickness/.test(path) && !path.startsWith('galaxy'));
  // Seen from the side, a larger step of the inclination would move rays past the rim of a slab.
  checkAgainstDifferences(scene, [...geometry, ...others], step);
});

test('derivatives of clumped electrons', () => {
  checkAgainstDifferences(sceneOf({ ...base, electrons: ['{model: exponential-disc, name: warm, density: 0.03 cm^-3, radius: 10 kpc, height: 1 kpc, filling: 0.3}'] }), ['thermalElectrons.warm.filling', 'thermalElectrons.warm.density']);
});

test('derivatives in equipartition', () => {
  const scene = sceneOf({ ...base, field: [...base.field, spiral] });
  checkAgainstDifferences({ ...scene, cosmicRays: { index: 2.8, layers: [], equipartition: { protonRatio: 100 } } }, ['cosmicRays.index', 'field.disc.strength', 'turbulence.unresolved.rms'], 1e-3);
});

test('rays have no derivative where a number acts by ways that are not followed', () => {
  const scene = sceneOf(base);
  const scaled = { ...scene, cosmicRays: { ...scene.cosmicRays, scaleTo: { fluxJy: 1, atHz: 1.4e9 } } };
  const absorbing = { ...scene, freeFree: { temperatureK: 8000 } };
  for (const one of [scaled, absorbing]) expect(findTangentParameter(one, 'field.even.x')).toBeUndefined();
  expect(findTangentParameter(scene, 'numerics.tolerance')).toBeUndefined();
});

test('a number at its default of 0 has a derivative', () => {
  const scene = sceneOf({ ...base, field: [spiral] });
  expect(scenePath(scene, 'field.disc.pitchSlope').get()).toBe(0);
  checkAgainstDifferences(scene, ['field.disc.pitchSlope']);
});

test('a Burn slab: ∂P/∂n_e is the closed form of its derivative', () => {
  // P/p0 = sin(x)/x e^{ix}, x = R λ², R = K n_e B L (Burn 1966); ∂/∂n_e = (x/n_e) d/dx.
  const [density, thickness, fieldUG] = [0.03, 1, 1.7];
  const square = 0.0441;
  const slab = (key: string): string => `{model: slab, ${key}, halfThickness: ${thickness / 2} kpc}`;
  const scene = sceneOf({
    tolerance: 1e-12, field: [`{model: uniform, x: 5 uG, y: 0 uG, z: ${fieldUG} uG}`],
    electrons: [slab(`name: warm, density: ${density} cm^-3`)], layers: [slab('normalisation: 1e-6 cm^-3')],
  });
  const x = faradayConstant.value * density * fieldUG * 1000 * thickness * square;
  const at = frequencies(speedOfLight.value / Math.sqrt(square));
  for (const backEnd of ['javascript', 'wasm'] as const) {
    const ray = followTangents(scene, at, { northKpc: Float64Array.of(0), eastKpc: Float64Array.of(0) }, ['thermalElectrons.warm.density'], backEnd);
    const { Q, U, I, faradayDepth } = slopesBy(ray, 0);
    // The electric vector lies east: P = -p0 …; d/dx (sin x/x e^{ix}) = e^{ix} (cos x/x - sin x/x² + i sin x/x).
    const [real, imaginary] = [Math.cos(x) / x - Math.sin(x) / x ** 2, Math.sin(x) / x];
    const factor = (-ray.emittedP[0] * x) / density;
    const exact = [factor * (Math.cos(x) * real - Math.sin(x) * imaginary), factor * (Math.sin(x) * real + Math.cos(x) * imaginary)];
    const size = Math.hypot(...exact);
    expect(Math.hypot(Q[0] - exact[0], U[0] - exact[1])).toBeLessThan(1e-11 * size);
    expect(I[0]).toBe(0);
    expect(Math.abs(faradayDepth[0] / (ray.faradayDepth[0] / density) - 1)).toBeLessThan(1e-12);
  }
});

test('surfaces that coincide and part are noticed', () => {
  const scene = sceneOf({ ...slabs, layers: ['{model: slab, name: cosmic, normalisation: 1e-5 cm^-3, halfThickness: 0.5 kpc}'] });
  const paths = ['thermalElectrons.warm.halfThickness', 'thermalElectrons.warm.density', 'galaxy.inclination'];
  expect(splitPaths(scene, paths)).toEqual(['thermalElectrons.warm.halfThickness']);
  expect(splitPaths(sceneOf(slabs), paths)).toEqual([]);
});
