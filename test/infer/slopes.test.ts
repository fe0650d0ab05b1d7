import { expect, test } from 'vitest';
import { fitModel, type Fit } from '../../src/infer/fit.ts';
import type { ForwardModel } from '../../src/infer/forward.ts';
import { makeJointModel } from '../../src/infer/joint-model.ts';
import { makeLikelihood } from '../../src/infer/likelihood.ts';
import { withCalibration } from '../../src/infer/nuisances.ts';
import type { OtherData } from '../../src/infer/other-data.ts';
import type { FreeParameter, Prior } from '../../src/infer/prior.ts';
import { sceneWith, type SceneOf } from '../../src/infer/scene-of.ts';
import { sceneSlopes } from '../../src/infer/scene-slopes.ts';
import { makeSkyModel } from '../../src/infer/sky-model.ts';
import { compileTie, followTies } from '../../src/infer/ties.ts';
import type { DataSet } from '../../src/infer/types.ts';
import { randomStream } from '../../src/math/random.ts';
import { localBackend } from '../../src/ray/job.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { scenePath } from '../../src/scene/paths.ts';
import { testAxes } from './grids.ts';

const sceneAt = (tolerance: number) => parseScene(`gyrelight: 1
title: Derivatives of an invented galaxy
galaxy: {distance: 10 Mpc, inclination: 40 deg, positionAngle: 25 deg, volume: {radius: 12 kpc, height: 4 kpc}, centre: {ra: 150 deg, dec: 20 deg}}
field:
  - {model: axisymmetric-spiral, name: disc, strength: 5 uG, pitch: -20 deg, radius: 7 kpc, innerRadius: 1 kpc, height: 0.8 kpc, closure: 3 kpc}
  - {model: quadrupole-halo, name: halo, strength: 1 uG, core: 2 kpc, reference: 4 kpc}
thermalElectrons: [{model: exponential-disc, name: warm, density: 0.03 cm^-3, radius: 8 kpc, height: 1 kpc}]
cosmicRays: {index: 2.8, layers: [{model: exponential-disc, name: cosmic, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1.2 kpc}]}
turbulence: {unresolved: {rms: 3 uG, cell: 0.05 kpc}}
observation:
  image: {pixels: 11, pixel: 40 arcsec}
  bands: [{name: L, at: [1.4 GHz]}]
  foreground: {depth: 7 rad/m^2, gradient: {amount: 0.01 rad/m^2/arcsec, angle: 30 deg}}
numerics: {tolerance: ${tolerance}, bits: 64}
`, 'slopes.scene.yaml');

const axes = testAxes(11, 11, 40);
const beam = { majorArcsec: 90, minorArcsec: 70, angle: 0.3 };
const channels = [{ frequencyHz: 1.4e9, widthHz: 3e7 }, { frequencyHz: 1.8e9, widthHz: 0 }];
const plane = (quantity: 'I' | 'Q' | 'U', channel: number) => ({ quantity, band: 0, channel, values: new Float64Array(axes.nx * axes.ny), noise: 1e-5, correlation: beam });
const data: DataSet = {
  axes, unit: 'Jy/beam', bands: [{ name: 'L', channels, beam }], assumptions: [],
  planes: [plane('I', 0), plane('Q', 0), plane('U', 0), plane('Q', 1), plane('U', 1)],
};

const paths = [
  'field.disc.strength', 'field.disc.pitch', 'thermalElectrons.warm.density', 'cosmicRays.index', 'galaxy.inclination', 'galaxy.positionAngle', 'galaxy.distance',
  'turbulence.unresolved.rms', 'observation.foreground.depth', 'observation.foreground.gradient.amount', 'observation.foreground.gradient.angle',
];

/** Central differences, once extrapolated (Richardson 1911), of a model's maps by each of its values. */
async function differences(model: ForwardModel, values: Float64Array, j: number): Promise<Float64Array[]> {
  const across = async (share: number): Promise<Float64Array[]> => {
    const step = share * (Math.abs(values[j]) || 1);
    const [ahead, behind] = await Promise.all([step, -step].map((by) => model(values.map((value, k) => (k === j ? value + by : value)))));
    return ahead.map((map, k) => map.map((value, p) => (value - behind[k][p]) / (2 * step)));
  };
  const [wide, narrow] = [await across(2e-3), await across(1e-3)];
  return narrow.map((map, k) => map.map((value, p) => (4 * value - wide[k][p]) / 3));
}

/** Largest difference over the largest of the second, over all maps of one quantity. */
function worst(a: readonly Float64Array[], b: readonly Float64Array[]): number {
  const size = (maps: readonly Float64Array[]): number => Math.max(...maps.map((map) => map.reduce((most, value) => Math.max(most, Math.abs(value)), 0)));
  return size(a.map((map, k) => map.map((value, p) => value - b[k][p]))) / size(b);
}

// The error of differences with steps of 0.002 is of fourth order: 1e-9 to 1e-7 of the largest.
const wanted = 2e-6;

test('a sky model differentiates its maps through channels, foreground, beam and calibration', async () => {
  const scene = sceneAt(1e-9);
  const sceneOf: SceneOf = (values) => sceneWith(scene, paths, values);
  const bare = makeSkyModel(data, scene, sceneOf, localBackend());
  const free = (path: string, calibrationBand?: number): FreeParameter => ({
    path, unit: '', shownUnit: '', prior: { kind: 'uniform', low: 0, high: 1 }, allowed: [0, 1], start: 1, ...(calibrationBand !== undefined && { calibrationBand }),
  });
  const model = withCalibration(bare, data, [...paths.map((path) => free(path)), free('calibration.L', 0)]);
  const values = Float64Array.from([...paths.map((path) => scenePath(scene, path).get()), 1.1]);
  const slopes = await model.slopes!(values);
  const maps = await model(values);
  slopes!.maps.forEach((map, k) => expect(worst([map], [maps[k]])).toBeLessThan(1e-14));
  for (const [j, path] of [...paths, 'calibration'].entries()) {
    const column = slopes!.columns[j]!;
    const expected = await differences(model, values, j);
    for (const wantedPlanes of [[1, 2, 3, 4], [0]]) {
      const pick = (list: readonly Float64Array[]): Float64Array[] => wantedPlanes.map((k) => list[k]);
      if (pick(expected).every((map) => map.every((value) => Math.abs(value) < 1e-15))) continue;
      expect(worst(pick(column), pick(expected)), path).toBeLessThan(wanted);
    }
  }
});

test('ties carry derivatives on, and what rays have none by is left to differences', () => {
  const scene = sceneAt(1e-4);
  const tie = compileTie({ name: 'field.halo.strength', formula: 'B^2/10', unit: 'uG', where: { B: 'field.disc.strength' }, place: { file: 'x' } }, scene);
  const free = ['field.disc.strength', 'numerics.tolerance', 'field.disc.pitch'];
  const sceneOf: SceneOf = (values) => followTies(sceneWith(scene, free, values), [tie]);
  const { paths: needed, columns } = sceneSlopes(sceneOf, Float64Array.of(6, 1e-4, -0.3), 3);
  expect(needed).toEqual(['field.disc.pitch', 'field.disc.strength', 'field.halo.strength']);
  expect(columns[1]).toBeUndefined();
  // d(B²/10)/dB = 1.2 at 6 uG.
  [0, 1, 1.2].forEach((rate, p) => expect(Math.abs(columns[0]!.rates[p] - rate)).toBeLessThan(1e-9));
  // Where the next step is not allowed, the other side serves.
  const edge = sceneSlopes((values) => sceneWith(scene, ['galaxy.inclination'], values), Float64Array.of(0), 1);
  expect(Math.abs(edge.columns[0]!.rates[0] - 1)).toBeLessThan(1e-9);
});

test('P, chi, RM, profiles, spectra and sources follow by the chain rule', async () => {
  const scene = sceneAt(1e-9);
  const base = { label: 'x', weight: 1, sigma: new Float64Array(0), values: new Float64Array(0) };
  const others: OtherData[] = [
    { ...base, quantity: 'RM', kind: 'sources', channels: [], places: [{ raDeg: 150.02, decDeg: 20.01 }, { raDeg: 150, decDeg: 20.02 }] },
    { ...base, quantity: 'P', kind: 'map', channels, beam },
    { ...base, quantity: 'chi', kind: 'sectors', channels: [channels[0]], beam, ring: { innerKpc: 3, outerKpc: 7, sectors: 4 } },
    { ...base, quantity: 'P', kind: 'spectrum', channels },
    { ...base, quantity: 'RM', kind: 'sectors', channels, beam, ring: { innerKpc: 3, outerKpc: 7, sectors: 4 } },
  ];
  const joint = ['field.disc.strength', 'thermalElectrons.warm.height', 'observation.foreground.depth'];
  const model = makeJointModel({ ...data, others }, scene, (values) => sceneWith(scene, joint, values), localBackend());
  const values = Float64Array.from(joint, (path) => scenePath(scene, path).get());
  const slopes = await model.slopes!(values);
  for (const [j, path] of joint.entries()) {
    const expected = await differences(model, values, j);
    const first = data.planes.length;
    expect(slopes!.columns[j]!.length).toBe(first + others.length);
    others.forEach((other, k) => {
      const [given, want] = [slopes!.columns[j]![first + k], expected[first + k]];
      if (want.every((value) => Math.abs(value) < 1e-15)) return;
      expect(worst([given], [want]), `${other.kind} ${other.quantity} by ${path}`).toBeLessThan(1e-5);
    });
  }
});

test('a fit by exact derivatives ends where differences end, with fewer models', async () => {
  const scene = sceneAt(1e-4);
  const free: readonly (readonly [string, Prior])[] = [
    ['field.disc.strength', { kind: 'logUniform', low: 1, high: 20 }],
    ['field.disc.pitch', { kind: 'uniform', low: -1, high: 0.5 }],
    ['field.halo.strength', { kind: 'uniform', low: -3, high: 3 }],
    ['thermalElectrons.warm.density', { kind: 'logUniform', low: 0.003, high: 0.3 }],
    ['cosmicRays.cosmic.height', { kind: 'uniform', low: 0.3, high: 3 }],
    ['galaxy.inclination', { kind: 'isotropic', low: 0.2, high: 1.3 }],
    ['observation.foreground.depth', { kind: 'normal', mean: 0, sigma: 20 }],
  ];
  const names = free.map(([path]) => path);
  const parameters = free.map(([path, prior]): FreeParameter => ({ path, unit: '', shownUnit: '', prior, allowed: [-1e3, 1e3], start: 1.15 * scenePath(scene, path).get() }));
  const forward = makeSkyModel(data, scene, (values) => sceneWith(scene, names, values), localBackend());
  const truth = Float64Array.from(names, (path) => scenePath(scene, path).get());
  const noise = randomStream(5, 'noise');
  const seen = (await forward(truth)).map((map) => {
    const rms = 0.02 * map.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
    return { values: map.map((value) => value + rms * noise.gaussian()), noise: rms };
  });
  const likelihood = makeLikelihood({ ...data, planes: data.planes.map((one, k) => ({ quantity: one.quantity, band: one.band, channel: one.channel, ...seen[k] })) });
  const fit = (model: ForwardModel): Promise<Fit> => fitModel({ parameters, forward: model, likelihood, seed: 1, starts: 0, descents: 1 });
  const exact = await fit(forward);
  const plain = await fit((values, signal) => forward(values, signal));
  expect(exact.converged && plain.converged).toBe(true);
  exact.values.forEach((value, j) => {
    // Either stops when chi2 falls by less than 0.01: a tenth of a standard error.
    expect(Math.abs(value - plain.values[j]), names[j]).toBeLessThan(0.15 * exact.errors[j]);
    expect(Math.abs(exact.errors[j] / plain.errors[j] - 1), names[j]).toBeLessThan(0.02);
  });
  // Two models a step, where differences take one more than there are parameters.
  expect(exact.evaluations).toBeLessThan(plain.evaluations / 2);
});
