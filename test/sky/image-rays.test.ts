import { expect, test } from 'vitest';
import type { RayBackend, RayJob } from '../../src/ray/job.ts';
import { localBackend } from '../../src/ray/job.ts';
import type { RayBundle, RayResult } from '../../src/ray/types.ts';
import { traceFaintToo } from '../../src/sky/faint-rays.ts';
import { traceImage } from '../../src/sky/image-rays.ts';
import { imageStride } from '../../src/sky/image-stride.ts';
import { interpolateAt, interpolateCell, stencilsOf } from '../../src/sky/lattice.ts';
import { frequencies, sceneOf } from '../ray/scenes.ts';

const spiral = '{model: axisymmetric-spiral, strength: 8 uG, pitch: -20 deg, radius: 8 kpc, innerRadius: 1 kpc, height: 0.6 kpc, closure: 4 kpc}';
const scene = sceneOf({ inclination: 40, positionAngle: 25, field: [spiral, '{model: quadrupole-halo, strength: 2 uG, core: 2 kpc, reference: 5 kpc}'], layers: ['{model: exponential-disc, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1.5 kpc}'] });

const image = (nx: number, ny: number, stepKpc: number, east = 0): RayBundle => ({
  northKpc: Float64Array.from({ length: nx * ny }, (_, k) => (Math.floor(k / nx) - (ny - 1) / 2) * stepKpc),
  eastKpc: Float64Array.from({ length: nx * ny }, (_, k) => east - ((k % nx) - (nx - 1) / 2) * stepKpc),
});

/** A backend whose rays are functions of their place, exact; counts them. */
function formulaBackend(P: (x: number, y: number) => number): { backend: RayBackend; followed: () => number } {
  let count = 0;
  const backend = async ({ bundle, spectrum }: RayJob): Promise<RayResult> => {
    const rays = bundle.northKpc.length;
    count += rays;
    const plane = (f: (x: number, y: number, k: number) => number): Float64Array =>
      Float64Array.from({ length: spectrum.length * rays }, (_, k) => f(bundle.eastKpc[k % rays], bundle.northKpc[k % rays], Math.floor(k / rays)));
    const zero = plane(() => 0);
    return { I: plane(() => 1), Q: plane((x, y) => P(x, y)), U: zero, heightQ: zero, heightU: zero, emittedP: zero, faradayDepth: zero.slice(0, rays), error: new Float64Array(spectrum.length), samples: rays };
  };
  return { backend, followed: () => count };
}

test('the lattice carries polynomials of degree five exactly, at the edges too', () => {
  const polynomial = (x: number, y: number): number => 1 + x - 2 * y + 0.3 * x * y * y - 0.01 * x ** 5 + 0.02 * y ** 4 * x ** 3;
  const [nx, ny, stride] = [33, 29, 4];
  const values = Float64Array.from({ length: nx * ny }, (_, k) => polynomial((k % nx) / 10, Math.floor(k / nx) / 10));
  const [rows, columns] = [stencilsOf(7, stride), stencilsOf(8, stride)];
  const filled = new Float64Array(25);
  for (const [row, column] of [[0, 0], [3, 4], [6, 7], [0, 5], [6, 0]]) {
    interpolateCell({ values, start: 0, nx, stride }, rows[row], columns[column], filled);
    for (let place = 0; place < 25; place++) {
      const [a, b] = [Math.floor(place / 5), place % 5];
      const exact = values[(row * stride + a) * nx + column * stride + b];
      // Rounding: sums of 36 terms of size up to 50, Lebesgue constant below 20.
      expect(Math.abs(filled[place] - exact)).toBeLessThan(1e-12);
      expect(Math.abs(interpolateAt({ values, start: 0, nx, stride }, rows[row], columns[column], a, b) - exact)).toBeLessThan(1e-12);
    }
  }
});

test.each<[string, (x: number, y: number) => number, number]>([
  ['waves of 6 kpc', (x, y) => Math.sin(x + 0.3 * y) * Math.cos(y), 0.3],
  ['a kink along a line', (x, y) => Math.exp(-x * x / 20) + 0.2 * Math.abs(x + 0.41 * y - 0.03), 0.5],
  ['a jump along a circle', (x, y) => (Math.hypot(x - 0.2, y) < 1.7 ? 1 : 0.5), 0.5],
  ['noise', (x, y) => Math.sin(1e4 * x * x + 3e3 * y), 1],
])('%s are within the tolerance of every pixel, and what is let pass is stated', async (_, P, mostFollowed) => {
  const [nx, ny] = [150, 131];
  const bundle = image(nx, ny, 0.05);
  const { backend, followed } = formulaBackend(P);
  const job = { scene, spectrum: frequencies(1.4e9), bundle };
  const { result, followed: told } = await traceImage(backend, job, { nx, ny, stride: 8 }, {});
  const exact = bundle.eastKpc.map((x, k) => P(x, bundle.northKpc[k]));
  const scale = exact.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
  const error = exact.reduce((most, value, k) => Math.max(most, Math.abs(result.Q[k] - value)), 0) / scale;
  expect(error).toBeLessThan(0.3e-4);
  expect(error).toBeLessThan(result.error[0] + 1e-12);
  expect(told).toBe(followed());
  expect(told / (nx * ny)).toBeLessThan(mostFollowed + 1e-9);
  expect(told / (nx * ny)).toBeGreaterThan(0.02);
});

test('a galaxy seen through the lattice is the galaxy, faint parts beside themselves too', async () => {
  const [nx, ny, stepKpc] = [97, 97, 0.12];
  const job = { scene, spectrum: frequencies(1.4e9, 4.8e9), bundle: image(nx, ny, stepKpc, 5) };
  const backend = localBackend();
  const whole = await traceFaintToo(backend, job, {});
  const { result, followed } = await traceImage(backend, job, { nx, ny, stride: 4 }, {});
  expect(followed / (nx * ny)).toBeLessThan(0.75);
  const pixels = nx * ny;
  const [levelOf, brightest] = [(value: number): number => Math.min(3, Math.floor(-Math.log10(value / brightest) / 2)), Math.max(...whole.I.subarray(0, pixels))];
  for (let k = 0; k < 2; k++) {
    const size = (j: number): number => Math.hypot(whole.Q[k * pixels + j], whole.U[k * pixels + j]);
    const largest = [0, 1, 2, 3].map((level) => {
      const own = Array.from({ length: pixels }, (_, j) => j).filter((j) => whole.I[j] > 0 && levelOf(whole.I[j]) >= level);
      return Math.max(...own.map((j) => Math.max(size(j), 1e-3 * whole.I[k * pixels + j])));
    });
    for (let j = 0; j < pixels; j++) {
      const at = k * pixels + j;
      if (whole.I[j] === 0) continue;
      // Both are within the tolerance, and the small share of it that is let pass.
      expect(Math.hypot(result.Q[at] - whole.Q[at], result.U[at] - whole.U[at])).toBeLessThan(1e-4 * largest[levelOf(whole.I[j])]);
    }
  }
});

test('stride 1 follows every ray, and rays that miss stay dark', async () => {
  const bundle = image(40, 40, 1);
  const job = { scene, spectrum: frequencies(1.4e9), bundle };
  const backend = localBackend();
  const { result, followed } = await traceImage(backend, job, { nx: 40, ny: 40, stride: 1 }, {});
  expect(followed).toBe(1600);
  expect(result).toEqual(await traceFaintToo(backend, job, {}));
  const thinned = await traceImage(backend, job, { nx: 40, ny: 40, stride: 4 }, {});
  bundle.northKpc.forEach((north, k) => {
    if (Math.hypot(north, bundle.eastKpc[k]) > 17.1) expect(thinned.result.I[k]).toBe(0);
  });
});

test('the lattice is no wider than the shortest length of a component, and 1 where lengths are unknown', () => {
  // The shortest length of the scene is the disc's height of 0.6 kpc.
  const grid = (pixelKpc: number, nx = 513): { nx: number; ny: number; pixelKpc: number } => ({ nx, ny: nx, pixelKpc });
  expect([0.01, 0.05, 0.075, 0.1, 0.2, 0.31].map((pixel) => imageStride(scene, grid(pixel)))).toEqual([16, 8, 8, 4, 2, 1]);
  expect(imageStride(scene, grid(0.05, 63))).toBe(4);
  const written = sceneOf({ field: [spiral, '{model: formula, name: f, field: {phi: "3*exp(-(r/0.01)^2)"}}'], layers: ['{model: exponential-disc, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1.5 kpc}'] });
  expect(imageStride(written, grid(0.01))).toBe(1);
});
