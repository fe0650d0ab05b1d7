import { expect, test } from 'vitest';
import { freeFreeOpacity, opaqueBrightness } from '../../src/ray/free-free.ts';
import { intrinsicPolarization, synchrotronEmissivity, wavelengthSquared } from '../../src/ray/synchrotron.ts';
import { faradayConstant, kelvinPerJanskySteradian, parsec } from '../../src/units/constants.ts';
import { relativeError } from '../sky/compare.ts';
import { denseRays } from './dense.ts';
import { follow, frequencies, sceneOf, type SceneParts } from './scenes.ts';

const temperature = 8000;
const gas = [`freeFree: {temperature: ${temperature} K}`];
const darkField = ['{model: uniform, x: 5 uG, y: 0 uG, z: 0 uG}'];
const layer = (normalisation: number): string => `{model: slab, normalisation: ${normalisation} cm^-3, halfThickness: 0.5 kpc}`;
const slab = (density: number): string => `{model: slab, density: ${density} cm^-3, halfThickness: 0.5 kpc}`;
const tolerance = 1e-11;

/** Jy/sr along 1 kpc of C = 1e-6 cm^-3 in 5 uG, p = 2.8, without gas. */
function brightness(frequencyHz: number): number {
  return synchrotronEmissivity(2.8, frequencyHz) * 1e-6 * Math.pow(5, 1.9) * parsec.value * 1e5 * 1e23;
}

// checks.json section 11, Mezger & Henderson 1967 with EM in pc cm^-6; computed there with numpy.
test.each([
  [1e4, 1, 1, 3.27841255e-7, 0.00327841201],
  [8000, 1.4, 1000, 0.000218586455, 1.74850053],
  [8000, 0.15, 1000, 0.02380677, 188.204995],
  [1e4, 5, 1e6, 0.0111641739, 111.020858],
])('optical depth and brightness at %d K, %d GHz, EM %d (checks.json 11.tau)', (kelvin, gigahertz, measure, depth, brightnessK) => {
  const tau = freeFreeOpacity(kelvin, gigahertz * 1e9) * measure;
  expect(relativeError(tau, depth)).toBeLessThan(5e-9);
  const inKelvin = (opaqueBrightness(kelvin, gigahertz * 1e9) * kelvinPerJanskySteradian.value) / (gigahertz * 1e9) ** 2;
  expect(relativeError(-inKelvin * Math.expm1(-tau), brightnessK)).toBeLessThan(5e-9);
});

test('emissivity of 0.03 cm^-3 at 8000 K and 1.4 GHz (checks.json 11.emis)', () => {
  // Jy/sr per pc to erg s^-1 cm^-3 Hz^-1 sr^-1.
  const perParsec = freeFreeOpacity(8000, 1.4e9) * 0.03 ** 2 * opaqueBrightness(8000, 1.4e9);
  expect(relativeError((perParsec * 1e-23) / (parsec.value * 100), 3.0713771e-43)).toBeLessThan(1e-8);
});

// From optically thin to a black body 2kTν²/c².
test.each([0.01, 1, 30, 1000])('a uniform slab of %d cm^-3 emits S(1 - e^-τ)', (density) => {
  const hz = 1.4e9;
  const ray = follow(sceneOf({ field: darkField, electrons: [slab(density)], layers: [layer(0)], more: gas, tolerance }), frequencies(hz), [0], [0]);
  const tau = freeFreeOpacity(temperature, hz) * density ** 2 * 1000;
  expect(relativeError(ray.I[0], -opaqueBrightness(temperature, hz) * Math.expm1(-tau))).toBeLessThan(1e-12);
  expect(ray.Q[0]).toBe(0);
});

const parts = (density: number, more: Partial<SceneParts> = {}): SceneParts => ({ field: darkField, electrons: [slab(density)], layers: [layer(1e-6)], more: gas, tolerance, ...more });

test('gas in front of an emitting layer dims I, Q, U and origins by e^-τ', () => {
  const hz = 4e8;
  const density = 3;
  const near = `{model: formula, name: near, parameters: {n: ${density} cm^-3}, density: "z > 1 && z < 2 ? n : 0", edges: {z: [1, 2]}}`.replace('z > 1 && z < 2 ? n : 0', 'z > 1 ? (z < 2 ? n : 0) : 0');
  const scene = sceneOf(parts(density, { electrons: [near] }));
  const ray = follow(scene, frequencies(hz), [0], [0]);
  const tau = freeFreeOpacity(temperature, hz) * density ** 2 * 1000;
  const through = Math.exp(-tau) * brightness(hz);
  expect(relativeError(ray.I[0], through - opaqueBrightness(temperature, hz) * Math.expm1(-tau))).toBeLessThan(1e-10);
  expect(relativeError(-ray.Q[0], intrinsicPolarization(2.8) * through)).toBeLessThan(1e-10);
  expect(relativeError(ray.emittedP[0], intrinsicPolarization(2.8) * brightness(hz))).toBeLessThan(1e-10);
});

test.each([0.3, 3, 30, 300])('gas of %d cm^-3 mixed with emission and rotation: (1 - e^-S)/S with S = τ - 2iλ²R', (density) => {
  const hz = 1e9;
  const field = 60 / (faradayConstant.value * density * 1000);
  const scene = sceneOf(parts(density, { field: [`{model: uniform, x: 5 uG, y: 0 uG, z: ${field} uG}`] }));
  const ray = follow(scene, frequencies(hz), [0], [0]);
  const tau = freeFreeOpacity(temperature, hz) * density ** 2 * 1000;
  const synchrotron = (-brightness(hz) * Math.expm1(-tau)) / tau;
  expect(relativeError(ray.I[0], synchrotron - opaqueBrightness(temperature, hz) * Math.expm1(-tau))).toBeLessThan(1e-9);
  const turn = 2 * wavelengthSquared(hz) * 60;
  // (1 - e^{-τ + i turn})/(τ - i turn)
  const [re, im] = [1 - Math.exp(-tau) * Math.cos(turn), -Math.exp(-tau) * Math.sin(turn)];
  const size = tau * tau + turn * turn;
  const full = intrinsicPolarization(2.8) * brightness(hz);
  const wanted = [(-full * (re * tau - im * turn)) / size, (-full * (im * tau + re * turn)) / size];
  expect(Math.hypot(ray.Q[0] - wanted[0], ray.U[0] - wanted[1]) / Math.hypot(...wanted)).toBeLessThan(1e-8);
});

test('clumps raise the emission measure and Σ by 1/f, and leave the rotation', () => {
  const hz = 1e9;
  const turbulence = '{rms: 2 uG, cell: 0.05 kpc}';
  const clumped = '{model: slab, density: 0.3 cm^-3, halfThickness: 0.5 kpc, filling: 0.1}';
  const field = ['{model: uniform, x: 5 uG, y: 0 uG, z: 0.3 uG}'];
  const smooth = follow(sceneOf(parts(0.3, { field, turbulence })), frequencies(hz), [0], [0]);
  const ray = follow(sceneOf(parts(0.3, { field, turbulence, electrons: [clumped] })), frequencies(hz), [0], [0]);
  expect(relativeError(ray.faradayDepth[0], smooth.faradayDepth[0])).toBeLessThan(1e-12);
  // The same rotation at a tenth of the squared cell rms gives the same ray but for the absorption.
  const tau = freeFreeOpacity(temperature, hz) * 0.09 * 1000;
  const alone = follow(sceneOf({ ...parts(0.3, { electrons: [clumped], layers: [layer(0)] }) }), frequencies(hz), [0], [0]);
  expect(relativeError(alone.I[0], -opaqueBrightness(temperature, hz) * Math.expm1(-10 * tau))).toBeLessThan(1e-12);
  const bound = { electrons: [clumped], more: [], field };
  const damped = follow(sceneOf(parts(0.3, { ...bound, turbulence })), frequencies(hz), [0], [0]);
  const same = follow(sceneOf(parts(0.3, { ...bound, electrons: [slab(0.3)], turbulence: '{rms: 2 uG, cell: 0.5 kpc}' })), frequencies(hz), [0], [0]);
  expect(relativeError(damped.Q[0], same.Q[0])).toBeLessThan(1e-12);
});

test('two layers with different filling factors: ⟨n²⟩ = n² + Σ n_i²(1/f_i - 1)', () => {
  const hz = 4e8;
  const clumped = (name: string, density: number, filling: number): string => `{model: slab, name: ${name}, density: ${density} cm^-3, halfThickness: 0.5 kpc, filling: ${filling}}`;
  const ray = follow(sceneOf(parts(0, { electrons: [clumped('a', 0.3, 0.1), clumped('b', 0.2, 0.5)], layers: [layer(0)] })), frequencies(hz), [0], [0]);
  const squared = 0.25 + 0.09 * 9 + 0.04;
  expect(relativeError(ray.I[0], -opaqueBrightness(temperature, hz) * Math.expm1(-freeFreeOpacity(temperature, hz) * squared * 1000))).toBeLessThan(1e-12);
});

const disc: SceneParts = {
  inclination: 55,
  positionAngle: 30,
  field: ['{model: axisymmetric-spiral, strength: 8 uG, pitch: -20 deg, radius: 8 kpc, innerRadius: 1 kpc, height: 0.6 kpc, closure: 4 kpc}', '{model: quadrupole-halo, name: halo, strength: 2 uG, core: 2 kpc, reference: 5 kpc}'],
  electrons: ['{model: sech2-disc, density: 0.05 cm^-3, radius: 6 kpc, height: 0.5 kpc, filling: 0.0005}'],
  layers: ['{model: exponential-disc, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1.5 kpc}'],
  turbulence: '{rms: 0.1 uG, cell: 0.05 kpc}',
  more: gas,
};
const spectrum = frequencies(2e8, 4e8, 1.4e9, 5e9);
const [north, east] = [[0.1, 3, -4, 7, 1, -9], [0.2, -2, 5, 1, -6, 3]];

test('JavaScript and WebAssembly agree where gas is thick and thin', () => {
  for (const turbulence of [disc.turbulence, undefined]) {
    const scene = sceneOf({ ...disc, turbulence });
    const [a, b] = (['javascript', 'wasm'] as const).map((backEnd) => follow(scene, spectrum, north, east, backEnd));
    expect(b.samples).toBe(a.samples);
    for (const name of ['I', 'Q', 'U', 'heightQ', 'heightU', 'emittedP'] as const) {
      for (let k = 0; k < spectrum.length; k++) {
        const plane = (values: Float64Array): Float64Array => values.subarray(k * north.length, (k + 1) * north.length);
        const size = Math.max(...plane(a[name].map(Math.abs)));
        plane(a[name]).forEach((value, ray) => expect(Math.abs(plane(b[name])[ray] - value)).toBeLessThan(1e-12 * size));
      }
    }
  }
});

test('the tolerance holds through thick gas', () => {
  for (const inclination of [0, 55, 88]) {
    const rough = follow(sceneOf({ ...disc, inclination, tolerance: 1e-4 }), spectrum, north, east);
    const dense = denseRays(sceneOf({ ...disc, inclination }), spectrum, north, east, 0.05);
    const planes = (name: 'I' | 'Q' | 'U'): number[] => spectrum.flatMap((_, k) => dense.map((ray) => ray[name][k]));
    const exact = { I: planes('I'), Q: planes('Q'), U: planes('U') };
    for (let k = 0; k < spectrum.length; k++) {
      const at = (ray: number): number => k * north.length + ray;
      const rays = north.map((_, ray) => at(ray));
      const largestI = Math.max(...rays.map((i) => exact.I[i]));
      const largestP = Math.max(1e-3 * largestI, ...rays.map((i) => Math.hypot(exact.Q[i], exact.U[i])));
      for (const i of rays) {
        expect(Math.abs(rough.I[i] - exact.I[i])).toBeLessThan(1e-4 * largestI);
        expect(Math.hypot(rough.Q[i] - exact.Q[i], rough.U[i] - exact.U[i])).toBeLessThan(1e-4 * largestP);
      }
    }
    expect(rough.samples / north.length).toBeLessThan(2500);
  }
});
