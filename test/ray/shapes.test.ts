import { expect, test } from 'vitest';
import { armSharpness } from '../../src/model/modulation.ts';
import { measureDivergence, probeScene, type Probe } from '../../src/ray/probe.ts';
import { measureSymmetry } from '../../src/ray/symmetry.ts';
import { scenePath, scenePaths } from '../../src/scene/paths.ts';
import type { Scene } from '../../src/scene/types.ts';
import { relativeError } from '../sky/compare.ts';
import { follow, frequencies, sceneOf } from './scenes.ts';

const uniform = '{model: uniform, x: 1 uG, y: 0 uG, z: 0 uG}';
const layer = '{model: exponential-disc, name: layer, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1 kpc}';
const degree = Math.PI / 180;
const arms = 'arms: {number: 2, pitch: -15 deg, width: 40 deg, amplitude: 3, phase: 30 deg, reference: 5 kpc, innerRadius: 1 kpc}';
const disc = (more: string): string => `{model: exponential-disc, name: gas, density: 0.03 cm^-3, radius: 10 kpc, height: 1 kpc, ${more}}`;

function at(scene: Scene, ...points: readonly (readonly [r: number, azimuth: number, z: number])[]): Probe {
  const column = (pick: (point: (typeof points)[number]) => number): Float64Array => Float64Array.from(points, pick);
  return probeScene(scene, { x: column(([r, azimuth]) => r * Math.cos(azimuth)), y: column(([r, azimuth]) => r * Math.sin(azimuth)), z: column(([, , z]) => z) });
}

/** The excess M - 1 written out anew, with hyperbolic functions. */
function excess(r: number, azimuth: number): number {
  const psi = 2 * (azimuth - 30 * degree - Math.log(r / 5) / Math.tan(-15 * degree));
  const kappa = armSharpness(2, 40 * degree);
  const profile = (Math.exp(kappa * Math.cos(psi)) - Math.exp(-kappa)) / (2 * Math.sinh(kappa));
  return 3 * (1 - Math.exp(-r * r)) * profile;
}

test('arms of a density: ridge, space between, half maximum, and along the log-spiral', () => {
  const scene = sceneOf({ field: [uniform], electrons: [disc(arms)], layers: [layer] });
  const bare = (r: number): number => 0.03 * Math.exp(-r / 10);
  const fade = 1 - Math.exp(-25);
  // r = r_0 exp((φ - φ_0) tan p): half a turn further in.
  const along = 5 * Math.exp(Math.PI * Math.tan(-15 * degree));
  const { ne } = at(scene, [5, 30 * degree, 0], [5, 120 * degree, 0], [5, 50 * degree, 0], [5, 10 * degree, 0], [along, 210 * degree, 0], [3, 1, 0]);
  const expected = [bare(5) * (1 + 3 * fade), bare(5), bare(5) * (1 + 1.5 * fade), bare(5) * (1 + 1.5 * fade), bare(along) * (1 + 3 * (1 - Math.exp(-along * along))), bare(3) * (1 + excess(3, 1))];
  expected.forEach((value, k) => expect(relativeError(ne[k], value)).toBeLessThan(1e-10));
});

test('widths from narrow to cos² arms', () => {
  for (const [number, width] of [[1, 180], [2, 90], [2, 89.9], [4, 10], [1, 1]] as const) {
    const kappa = armSharpness(number, width * degree);
    const c = Math.cos((number * width * degree) / 2);
    const half = Math.exp(kappa * (c - 1)) * (Math.expm1(-kappa * (1 + c)) / Math.expm1(-2 * kappa));
    expect(Math.abs(half - 0.5)).toBeLessThan(1e-6);
  }
});

test('holes, flares and clumps of densities', () => {
  const { ne, C } = at(
    sceneOf({ field: [uniform], electrons: [disc('hole: {radius: 2 kpc}')], layers: [layer.replace('}', ', flare: {radius: 8 kpc, reference: 4 kpc}}')] }),
    [2, 0, 0], [4, 1, 0.5], [8, 1, 0.5],
  );
  expect(relativeError(ne[0], 0.03 * Math.exp(-0.2) * (1 - Math.exp(-1)))).toBeLessThan(1e-12);
  expect(relativeError(C[1], 1e-5 * Math.exp(-4 / 6) * Math.exp(-0.5))).toBeLessThan(1e-12);
  expect(relativeError(C[2], 1e-5 * Math.exp(-8 / 6) * Math.exp(-0.5 / Math.exp(0.5)))).toBeLessThan(1e-12);
  const linear = at(sceneOf({ field: [uniform], electrons: [disc('flare: {law: linear, radius: 5 kpc}')], layers: [layer] }), [10, 0, 0.6]);
  expect(relativeError(linear.ne[0], 0.03 * Math.exp(-1) * Math.exp(-0.2))).toBeLessThan(1e-12);
});

test('a flaring layer whose height follows the frequency has both', () => {
  const flared = '{model: exponential-disc, normalisation: 1e-5 cm^-3, radius: 1000 kpc, height: 1 kpc, heightIndex: 0.5, heightAt: 1.4 GHz, flare: {law: linear, radius: 5 kpc}}';
  const follows = (hz: number): number => follow(sceneOf({ field: [uniform], electrons: [], layers: [flared], height: 60, radius: 20, tolerance: 1e-10 }), frequencies(hz), [5], [0]).I[0];
  // At r = 5 kpc the height is 2 kpc, at a quarter of the frequency 4 kpc; j ∝ ν^-0.9.
  expect(relativeError(follows(0.35e9) / follows(1.4e9), 2 * 4 ** 0.9)).toBeLessThan(1e-6);
});

const spiral = (more: string): string => `{model: axisymmetric-spiral, name: disc, strength: 8 uG, pitch: -20 deg, radius: 8 kpc, innerRadius: 1 kpc, height: 0.6 kpc, closure: 4 kpc${more}}`;
const fieldScene = (...field: readonly string[]): Scene => sceneOf({ field, layers: [layer] });

test('arms of a disc field multiply it near the plane and leave ∇·B at rounding', () => {
  const points = [[5, 30 * degree, 0], [5, 120 * degree, 0], [3, 1, 0], [8, 4, 0]] as const;
  const [armed, bare] = [`, ${arms}`, ''].map((more) => at(fieldScene(spiral(more)), ...points));
  points.forEach(([r, azimuth], k) => {
    for (const component of ['Bx', 'By'] as const) expect(relativeError(armed[component][k], bare[component][k] * (1 + excess(r, azimuth)))).toBeLessThan(1e-10);
  });
  const scene = fieldScene(spiral(`, ${arms}`), '{model: spiral-mode, mode: 1, strength: 3 uG, pitch: -15 deg, radius: 8 kpc, innerRadius: 2 kpc, height: 0.5 kpc, reference: 5 kpc, phase: 20 deg, hole: {radius: 3 kpc}, flare: {radius: 10 kpc}}',
    `{model: quadrupole-halo, strength: 2 uG, core: 2 kpc, reference: 5 kpc, ${arms}, hole: {radius: 1 kpc}}`);
  for (const { byConstruction, largest } of measureDivergence(scene)) {
    expect(byConstruction).toBe(true);
    expect(largest).toBeLessThan(1e-9);
  }
});

test('∇·B by differences of the field itself, apart from all derivatives of the program', () => {
  const scene = fieldScene(spiral(`, ${arms}, flare: {radius: 9 kpc}, hole: {radius: 1.5 kpc}`));
  const h = 1e-3;
  for (const [x, y, z] of [[3, 2, 0.3], [-4, 1, -0.8], [1, -6, 1.5], [0.5, 0.4, 0.1]] as const) {
    const shifted = (axis: number, by: number): readonly number[] => [x, y, z].map((value, k) => value + (k === axis ? by : 0));
    const offsets = [-2, -1, 1, 2];
    const points = [0, 1, 2].flatMap((axis) => offsets.map((step) => shifted(axis, step * h)));
    const column = (k: number): Float64Array => Float64Array.from(points, (point) => point[k]);
    const { Bx, By, Bz } = probeScene(scene, { x: column(0), y: column(1), z: column(2) });
    const slope = (values: Float64Array, axis: number): number => [1 / 12, -2 / 3, 2 / 3, -1 / 12].reduce((sum, weight, k) => sum + (weight * values[4 * axis + k]) / h, 0);
    const norm = Math.hypot(...[Bx, By, Bz].flatMap((values) => [0, 1, 2].map((axis) => slope(values, axis))));
    expect(Math.abs(slope(Bx, 0) + slope(By, 1) + slope(Bz, 2)) / norm).toBeLessThan(1e-6);
  }
});

test('field lines of the arms close above the disc: nothing of them is left beyond the closure height', () => {
  const [armed, bare] = [`, ${arms}`, ''].map((more) => at(fieldScene(spiral(more)), [5, 1, 5.9], [5, 0, 0]));
  const strength = Math.hypot(bare.Bx[1], bare.By[1]);
  expect(Math.hypot(armed.Bx[0] - bare.Bx[0], armed.By[0] - bare.By[0], armed.Bz[0] - bare.Bz[0]) / strength).toBeLessThan(0.08);
});

test('magnetic arms can lie between the arms of the gas', () => {
  const between = arms.replace('phase: 30 deg', 'phase: 120 deg');
  const scene = sceneOf({ field: [spiral(`, ${between}`)], electrons: [disc(arms)], layers: [layer] });
  const ring = Array.from({ length: 72 }, (_, k) => [6, 5 * k * degree, 0] as const);
  const { ne, Bx, By } = at(scene, ...ring);
  const strongest = (values: ArrayLike<number>): number => Array.from(values).reduce((best, value, k) => (value > values[best] ? k : best), 0);
  const apart = Math.abs(strongest(ne) - strongest(Bx.map((value, k) => Math.hypot(value, By[k])))) % 36;
  expect(apart).toBe(18);
});

test('arms break the axisymmetry that `check` speaks of; holes and flares do not', () => {
  const symmetry = (field: string, electrons: string) => measureSymmetry(sceneOf({ field: [field], electrons: [electrons], layers: [layer] }));
  expect(symmetry(spiral(''), disc(arms)).axisymmetric).toBe(false);
  expect(symmetry(spiral(`, ${arms}`), disc('hole: {radius: 1 kpc}'))).toMatchObject({ axisymmetric: false, parity: 'even', evenDensities: true });
  expect(symmetry(spiral(', hole: {radius: 1 kpc}, flare: {radius: 9 kpc}'), disc('flare: {radius: 9 kpc}'))).toMatchObject({ axisymmetric: true, parity: 'even' });
});

test('every number of a shape has a path', () => {
  const scene = sceneOf({ field: [spiral(`, ${arms}`)], electrons: [disc('hole: {radius: 2 kpc}, flare: {radius: 9 kpc}, filling: 0.2')], layers: [layer] });
  const paths = scenePaths(scene);
  for (const path of ['field.disc.arms.pitch', 'field.disc.arms.phase', 'thermalElectrons.gas.hole.radius', 'thermalElectrons.gas.flare.reference', 'thermalElectrons.gas.filling']) expect(paths).toContain(path);
  const width = scenePath(scene, 'field.disc.arms.width');
  expect(scenePath(width.set(scene, 0.3), 'field.disc.arms.width').get()).toBe(0.3);
  expect(() => width.set(scene, 2)).toThrow(/too wide for 2: at most 90.00 deg/);
});

test('JavaScript and WebAssembly agree on modulated components', () => {
  const scene = sceneOf({ inclination: 50, field: [spiral(`, ${arms}`)], electrons: [disc(`${arms.replace('30 deg', '75 deg')}, flare: {radius: 9 kpc}`)], layers: [layer.replace('}', ', hole: {radius: 1 kpc}}')] });
  const [a, b] = (['javascript', 'wasm'] as const).map((backEnd) => follow(scene, frequencies(1.4e9, 4.8e9), [0.05, 4, -3], [0.02, 2, -5], backEnd));
  for (const name of ['I', 'Q', 'U'] as const) a[name].forEach((value, k) => expect(Math.abs(b[name][k] - value)).toBeLessThan(1e-12 * a.I[k]));
});

test.each([
  [uniform.replace('}', `, ${arms}}`), /"arms" cannot be used with "uniform": arms multiply a potential/],
  [uniform.replace('}', ', hole: {radius: 1 kpc}}'), /"hole" cannot be used with "uniform"/],
  ['{model: quadrupole-halo, strength: 2 uG, core: 2 kpc, reference: 5 kpc, flare: {radius: 3 kpc}}', /"flare" cannot be used with "quadrupole-halo": it has no parameter "height"/],
  [spiral(`, ${arms.replace('number: 2', 'number: 5')}`), /arms of 40.00 deg are too wide for 5: at most 36.00 deg/],
  [spiral(`, ${arms.replace('pitch: -15 deg', 'pitch: 0 deg')}`), /pitch/],
  [spiral(', filling: 0.2'), /unknown key "filling"/],
])('refuses %s', (field, message) => {
  expect(() => fieldScene(field)).toThrow(message);
});
