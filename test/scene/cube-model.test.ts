import { expect, test } from 'vitest';
import type { GridArray, GridSource } from '../../src/field/grid-file.ts';
import { measureDivergence, probeScene, randomPoints } from '../../src/ray/probe.ts';
import { localBackend, EngineCache } from '../../src/ray/job.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { sceneJsonSchema } from '../../src/scene/json-schema.ts';
import { scenePath } from '../../src/scene/paths.ts';
import type { Scene } from '../../src/scene/types.ts';
import { frequencies } from '../ray/scenes.ts';

type Point = readonly [x: number, y: number, z: number];

/** A smooth potential (uG kpc) and its curl (uG), worked out by hand. */
const potential = ([x, y, z]: Point): Point => [Math.sin(y / 2) * Math.cos(z / 3), Math.cos(x / 2 + z / 2), Math.sin(x / 3) * y];
const curl = ([x, y, z]: Point): Point => [
  Math.sin(x / 3) + Math.sin(x / 2 + z / 2) / 2,
  (-Math.sin(y / 2) * Math.sin(z / 3)) / 3 - (Math.cos(x / 3) * y) / 3,
  -Math.sin(x / 2 + z / 2) / 2 - (Math.cos(y / 2) * Math.cos(z / 3)) / 2,
];

const half = { x: 6, y: 6.5, z: 3 } as const;

/** Samples of one component at the centres of cells, indices in the order of `axes`. */
function sampled(f: (point: Point) => number, axes: string, counts: Readonly<Record<string, number>>): GridArray {
  const shape = [...axes].map((axis) => counts[axis]);
  const values = new Float64Array(shape[0] * shape[1] * shape[2]);
  for (let at = 0; at < values.length; at++) {
    const index = [Math.floor(at / (shape[1] * shape[2])), Math.floor(at / shape[2]) % shape[1], at % shape[2]];
    const place = Object.fromEntries([...axes].map((axis, k) => [axis, (-1 + (2 * index[k] + 1) / shape[k]) * half[axis as 'x' | 'y' | 'z']]));
    values[at] = f([place.x, place.y, place.z]);
  }
  return { name: '', shape, values, keywords: new Map() };
}

function source(files: Readonly<Record<string, GridArray>>): GridSource {
  return (file) => ({ arrays: [files[file]], sha256: `sum of ${file}` });
}

const counts = { x: 40, y: 44, z: 26 };
function filesOf(f: (point: Point) => Point, axes: string): Record<string, GridArray> {
  return Object.fromEntries([0, 1, 2].map((k) => [`${'xyz'[k]}.npy`, sampled((point) => f(point)[k], axes, counts)]));
}

const box = 'box: {x: [-6 kpc, 6 kpc], y: [-6.5 kpc, 6.5 kpc], z: [-3000 pc, 3 kpc]}';
function sceneText(component: string, more = 'thermalElectrons: [{model: gaussian-disc, density: 0.03 cm^-3, radius: 5 kpc, height: 1 kpc}]'): string {
  return `
gyrelight: 1
galaxy: {distance: 10 Mpc, inclination: 50 deg, positionAngle: 20 deg, volume: {radius: 5 kpc, height: 2.5 kpc}}
field: [${component}]
${more}
cosmicRays: {index: 2.8, layers: [{model: gaussian-disc, normalisation: 1e-5 cm^-3, radius: 4 kpc, height: 1 kpc}]}
observation: {image: {pixels: 8, pixel: 1 kpc}, bands: [{name: L, at: [1.4 GHz]}]}
`;
}

const cube = (keys: string, axes = 'xyz'): string => `{model: simulation-cube, name: sim, ${keys}, axes: ${axes}, ${box}}`;
const three = '{x: x.npy, y: y.npy, z: z.npy}';

/** Largest error of the field over its largest size at random points. */
function fieldError(scene: Scene, wanted: (point: Point) => Point): number {
  const points = randomPoints(scene, 500);
  const { Bx, By, Bz } = probeScene(scene, points);
  let [worst, size] = [0, 0];
  points.x.forEach((x, k) => {
    const [bx, by, bz] = wanted([x, points.y[k], points.z[k]]);
    size = Math.max(size, Math.hypot(bx, by, bz));
    worst = Math.max(worst, Math.hypot(Bx[k] - bx, By[k] - by, Bz[k] - bz));
  });
  return worst / size;
}

test.each(['xyz', 'zyx', 'yxz', 'zxy'])('a potential with indices %s gives its curl, free of divergence', (axes) => {
  const scene = parseScene(sceneText(cube(`potential: ${three}, unit: uG kpc`, axes)), 's.yaml', [], source(filesOf(potential, axes)));
  // Fourth-order interpolation of a potential that varies over 2 to 3 kpc, cells of 0.3 kpc; derivatives third order.
  expect(fieldError(scene, curl)).toBeLessThan(2e-4);
  const [{ name, byConstruction, largest }] = measureDivergence(scene);
  expect(name).toBe('sim');
  expect(byConstruction).toBe(true);
  expect(largest).toBeLessThan(1e-12);
  expect(scene.inputs).toEqual(['x.npy', 'y.npy', 'z.npy'].map((file) => ({ file, sha256: `sum of ${file}` })));
});

test('B itself is met, its divergence measured; one that is no field is found out', () => {
  const given = cube(`field: ${three}, unit: nG`);
  const right = parseScene(sceneText(given), 's.yaml', [], source(filesOf((point) => curl(point).map((b) => 1000 * b) as unknown as Point, 'xyz')));
  expect(fieldError(right, curl)).toBeLessThan(2e-4);
  const [measured] = measureDivergence(right);
  expect(measured.byConstruction).toBe(false);
  expect(measured.largest).toBeLessThan(1e-3);
  const wrong = parseScene(sceneText(given), 's.yaml', [], source(filesOf(([x, y, z]) => [x, y, z], 'xyz')));
  expect(measureDivergence(wrong)[0].largest).toBeGreaterThan(0.5);
});

test('one file may hold all components, and units, scale and its path count', () => {
  const parts = Object.values(filesOf(curl, 'zyx'));
  const together = new Float64Array(parts.flatMap(({ values }) => [...values]).map((value) => value / 1e6));
  const file: GridArray = { name: '', shape: [3, ...parts[0].shape], values: together, keywords: new Map() };
  const scene = parseScene(sceneText(cube('field: b.fits, unit: G, scale: 2', 'zyx')), 's.yaml', [], source({ 'b.fits': file }));
  expect(fieldError(scene, (point) => curl(point).map((b) => 2 * b) as unknown as Point)).toBeLessThan(2e-4);
  const path = scenePath(scene, 'field.sim.scale');
  expect(fieldError(path.set(scene, 1), curl)).toBeLessThan(2e-4);
});

test('a density on a grid is read where it is asked for', () => {
  const density = ([x, y, z]: Point): number => 0.02 * (2 + Math.cos(x / 2) * Math.sin(y / 3) + Math.cos(z));
  const files = { 'ne.npy': sampled(density, 'xyz', counts) };
  const more = `thermalElectrons: [{model: simulation-cube, density: ne.npy, unit: cm^-3, axes: xyz, ${box}}]`;
  const scene = parseScene(sceneText('{model: uniform, x: 1 uG, y: 0 uG, z: 0 uG}', more), 's.yaml', [], source(files));
  const points = randomPoints(scene, 300);
  const { ne } = probeScene(scene, points);
  ne.forEach((value, k) => expect(Math.abs(value - density([points.x[k], points.y[k], points.z[k]]))).toBeLessThan(1e-4 * 0.08));
});

test('maps through a cube are those of formulas, in both back ends', async () => {
  const bundle = { northKpc: Float64Array.from({ length: 40 }, (_, k) => Math.cos(2.4 * k) * 0.1 * k), eastKpc: Float64Array.from({ length: 40 }, (_, k) => Math.sin(2.4 * k) * 0.1 * k) };
  const spectrum = frequencies(1.4e9, 4.8e9);
  const cubeScene = parseScene(sceneText(cube(`potential: ${three}, unit: uG kpc`)), 's.yaml', [], source(filesOf(potential, 'xyz')));
  const formula = '{model: formula, potential: {x: "sin(y/2)*cos(z/3)", y: "cos(x/2 + z/2)", z: "sin(x/3)*y"}}';
  const formulaScene = parseScene(sceneText(formula), 's.yaml');
  const run = (scene: Scene, backEnd: 'wasm' | 'javascript') => localBackend(new EngineCache(backEnd))({ scene, spectrum, bundle });
  const [wasm, javascript, smooth] = await Promise.all([run(cubeScene, 'wasm'), run(cubeScene, 'javascript'), run(formulaScene, 'wasm')]);
  const size = Math.max(...smooth.I);
  for (const quantity of ['I', 'Q', 'U'] as const) {
    smooth[quantity].forEach((value, k) => {
      // Different code takes the same panels: rounding. Against the formula: interpolation and tolerance.
      expect(Math.abs(wasm[quantity][k] - javascript[quantity][k])).toBeLessThan(1e-9 * size);
      expect(Math.abs(wasm[quantity][k] - value)).toBeLessThan(2e-3 * size);
    });
  }
});

const good = filesOf(potential, 'xyz');
const nan = { ...good, 'y.npy': { ...good['y.npy'], values: good['y.npy'].values.map((value, k) => (k === 44 * 26 + 27 ? NaN : value)) } };
const odd = { ...good, 'z.npy': sampled((point) => point[0], 'xyz', { x: 40, y: 44, z: 25 }) };
const flat = { ...good, 'x.npy': { ...good['x.npy'], shape: [40, 1144] } };
const huge = Object.fromEntries(Object.entries(good).map(([file, array]) => [file, { ...array, shape: [800, 800, 800] }]));

test.each([
  ['a value that is no number', cube(`potential: ${three}, unit: uG kpc`), nan, /s\.yaml:4:\d+: y\.npy has 1 of 45760 values that are no finite numbers, the first, NaN, at index \[1, 1, 1\]/],
  ['shapes that differ', cube(`potential: ${three}, unit: uG kpc`), odd, /z\.npy is an array of 40 x 44 x 25 numbers, x\.npy one of 40 x 44 x 26/],
  ['too few indices', cube(`potential: ${three}, unit: uG kpc`), flat, /x\.npy is an array of 40 x 1144 numbers; 3 indices are wanted/],
  ['more than memory', cube(`potential: ${three}, unit: uG kpc`), huge, /3 x 800 x 800 x 800 numbers need 5\.\d+ GiB of memory in every worker; at most 1\.00 GiB/],
  ['a box that is too small', cube(`potential: ${three}, unit: uG kpc`).replace('[-6 kpc, 6 kpc]', '[-6 kpc, 4 kpc]'), good, /the box reaches from -6 kpc to 4 kpc along x and does not cover the scene's volume, -5 kpc to 5 kpc/],
  ['an empty box', cube(`potential: ${three}, unit: uG kpc`).replace('[-6 kpc, 6 kpc]', '[6 kpc, -6 kpc]'), good, /from 6 kpc to -6 kpc along x, which is empty/],
  ['the unit of B for A', cube(`potential: ${three}, unit: uG`), good, /cannot be said in "uG kpc"/],
  ['neither B nor A', cube('unit: uG'), good, /either "field" \(B\) or "potential" \(A\)/],
  ['axes that are none', cube(`potential: ${three}, unit: uG kpc`, 'xyy'), good, /"xyy" is not allowed: axes is one of xyz/],
])('%s is refused in words', (_, component, files, message) => {
  expect(() => parseScene(sceneText(component), 's.yaml', [], source(files))).toThrow(message);
});

test('a scene that names files is refused where there are none', () => {
  expect(() => parseScene(sceneText(cube(`potential: ${three}, unit: uG kpc`)), 's.yaml')).toThrow('this scene was given without its files');
});

test('the JSON Schema knows the keys of a cube', () => {
  expect(JSON.stringify(sceneJsonSchema())).toContain('simulation-cube');
});
