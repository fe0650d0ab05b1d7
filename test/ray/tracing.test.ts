import { expect, test } from 'vitest';
import type { SpectralPoint } from '../../src/ray/integrand.ts';
import { EngineCache, joinTiles, localBackend, tilesOf } from '../../src/ray/job.ts';
import { findBreaks } from '../../src/ray/path.ts';
import { panelNodes, panelRule } from '../../src/ray/panel.ts';
import { exactSineCosine } from '../../src/ray/scene-graph.ts';
import { findMapScale, makeRayEngine, NotANumberError, pickRays, rayGeometry, traceRays } from '../../src/ray/trace.ts';
import type { RayResult } from '../../src/ray/types.ts';
import type { Scene } from '../../src/scene/types.ts';
import { denseRays } from './dense.ts';
import { follow, frequencies, sceneOf, type SceneParts } from './scenes.ts';

const spiral = '{model: axisymmetric-spiral, strength: 6 uG, pitch: -20 deg, radius: 8 kpc, innerRadius: 1 kpc, height: 0.7 kpc, closure: 4 kpc}';
const quadrupole = '{model: quadrupole-halo, strength: 2 uG, core: 2 kpc, reference: 5 kpc}';
const layers = ['{model: exponential-disc, name: c, normalisation: 1e-5 cm^-3, radius: 8 kpc, height: 1.2 kpc}'];
const base: SceneParts = { inclination: 38, positionAngle: 25, field: [spiral, quadrupole], layers, tolerance: 1e-6 };
const north = Array.from({ length: 30 }, (_, k) => 9 * Math.sin(1.7 * k + 0.3));
const east = Array.from({ length: 30 }, (_, k) => 8 * Math.cos(2.9 * k));
const spectrum = frequencies(0.35e9, 1.4e9, 4.8e9);

/** Largest error over frequencies on the scale of physics.md section 3, of rays against brute force. */
function missOfDense(scene: Scene, points: readonly SpectralPoint[], panelKpc: number): number {
  const [given, dense] = [follow(scene, points, north, east), denseRays(scene, points, north, east, panelKpc)];
  return Math.max(
    ...points.map((_, f) => {
      const scaleI = Math.max(...dense.map((ray) => ray.I[f]));
      const scaleP = Math.max(1e-3 * scaleI, ...dense.map((ray) => Math.hypot(ray.Q[f], ray.U[f])));
      return Math.max(...dense.map((ray, k) => {
        const at = f * north.length + k;
        return Math.max(Math.abs(given.I[at] - ray.I[f]) / scaleI, Math.abs(given.Q[at] - ray.Q[f]) / scaleP, Math.abs(given.U[at] - ray.U[f]) / scaleP);
      }));
    }),
  );
}

test.each([0, 0.01, 38, 90, 142, 180])('i = %d°: within tolerance of brute force', (inclination) => {
  expect(missOfDense(sceneOf({ ...base, inclination }), spectrum, 0.1)).toBeLessThan(1e-6);
});

test('right angles are exact: z is constant along rays at i = 90°, y at 0° and 180°', () => {
  expect(exactSineCosine(Math.PI / 2)).toEqual([1, 0]);
  expect(exactSineCosine(Math.PI)).toEqual([0, -1]);
  expect(exactSineCosine(0)).toEqual([0, 1]);
  expect(exactSineCosine((3 * Math.PI) / 2)).toEqual([-1, 0]);
  // A field that is strong within 1e-9 kpc of z = 1 kpc alone is seen whole at i = 90° by the ray at that height.
  const field = '{model: formula, name: sheet, field: {x: "abs(z - 1) < 1e-9 ? 5 : 0"}}';
  const scene = sceneOf({ ...base, inclination: 90, positionAngle: 0, field: [field] });
  const { I } = follow(scene, frequencies(1.4e9), [0.5, 0.5], [1, 1.001]);
  expect(I[0]).toBeGreaterThan(0);
  expect(I[1]).toBeLessThan(1e-12 * I[0]);
});

test('a map of faint sky with one bright ray is followed as fast as another', () => {
  // Its 90 % point is 1e-30 of its largest brightness: a scale of that size could never be met.
  const field = '{model: formula, name: tube, field: {x: "x^2 < 1 ? 5 : 1e-12"}}';
  const scene = sceneOf({ ...base, positionAngle: 0, field: [field] });
  const { samples } = follow(scene, spectrum, [0.5, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12], new Array<number>(12).fill(1));
  expect(samples).toBeLessThan(12 * 1000);
});

test.each([0, 90, 180])('nothing jumps at i = %d°', (inclination) => {
  const away = inclination === 180 ? 179.9999 : inclination + 1e-4;
  const [exact, near] = [inclination, away].map((deg) => follow(sceneOf({ ...base, inclination: deg }), spectrum, north, east));
  const scale = Math.max(...exact.I);
  // 1e-4 deg moves the far end of a ray by 5e-5 kpc.
  exact.I.forEach((value, k) => expect(Math.abs(near.I[k] - value)).toBeLessThan(1e-3 * scale));
  exact.faradayDepth.forEach((value, k) => expect(Math.abs(near.faradayDepth[k] - value)).toBeLessThan(0.05 + 1e-3 * Math.abs(value)));
});

test('a ray that misses the volume brings nothing', () => {
  for (const inclination of [0, 60, 90, 180]) {
    const { I, Q, U, faradayDepth } = follow(sceneOf({ ...base, inclination }), spectrum, [0, 20, 0], [1, 0, 40]);
    for (const ray of [1, 2]) {
      expect([0, 1, 2].map((f) => [I, Q, U].map((list) => list[3 * f + ray])).flat()).toEqual(new Array(9).fill(0));
      expect(faradayDepth[ray]).toBe(0);
    }
    expect(I[0]).toBeGreaterThan(0);
  }
});

test('layers whose height depends on frequency: one scene equals several with the height set by hand', () => {
  const layer = (height: string): string => `{model: exponential-disc, name: c, normalisation: 1e-5 cm^-3, radius: 8 kpc, height: ${height}}`;
  const law = sceneOf({ ...base, layers: [layer('1.2 kpc, heightIndex: 0.25, heightAt: 1.4 GHz')] });
  const together = follow(law, spectrum, north, east);
  spectrum.forEach(({ frequencyHz }, f) => {
    const height = 1.2 * (frequencyHz / 1.4e9) ** -0.25;
    const alone = follow(sceneOf({ ...base, layers: [layer(`${height} kpc`)] }), frequencies(frequencyHz), north, east);
    const scale = Math.max(...alone.I);
    const polarized = Math.max(1e-3 * scale, ...alone.Q.map((Q, k) => Math.hypot(Q, alone.U[k])));
    for (let k = 0; k < north.length; k++) {
      const at = f * north.length + k;
      expect(Math.abs(together.I[at] - alone.I[k])).toBeLessThan(2e-6 * scale);
      expect(Math.hypot(together.Q[at] - alone.Q[k], together.U[at] - alone.U[k])).toBeLessThan(4e-6 * polarized);
    }
  });
});

test('the height is that of the channel, not of the frequency within it', () => {
  const layer = '{model: exponential-disc, name: c, normalisation: 1e-5 cm^-3, radius: 8 kpc, height: 1.2 kpc, heightIndex: 0.5, heightAt: 1 GHz}';
  const scene = sceneOf({ ...base, layers: [layer] });
  const inside = follow(scene, [{ frequencyHz: 1.3e9, centreHz: 1.4e9 }], [3], [1]);
  const outside = follow(scene, [{ frequencyHz: 1.3e9, centreHz: 1.3e9 }], [3], [1]);
  expect(Math.abs(inside.I[0] / outside.I[0] - 1)).toBeGreaterThan(0.01);
});

test('results are the same, bit for bit, for any cut into tiles and by the backend', async () => {
  const scene = sceneOf({ ...base, tolerance: 1e-4, turbulence: '{rms: 3 uG, cell: 0.05 kpc}' });
  const count = 300;
  const bundle = { northKpc: Float64Array.from({ length: count }, (_, k) => 10 * Math.sin(k)), eastKpc: Float64Array.from({ length: count }, (_, k) => 10 * Math.cos(1.3 * k)) };
  const engine = makeRayEngine(scene, spectrum);
  const scale = findMapScale(engine, scene, bundle);
  const whole = traceRays(engine, scene, bundle, scale);
  const columns = ['I', 'Q', 'U', 'heightQ', 'heightU', 'emittedP', 'faradayDepth', 'error'] as const;
  const same = (other: RayResult): void => {
    for (const column of columns) expect(other[column]).toEqual(whole[column]);
    expect(other.samples).toBe(whole.samples);
  };
  for (const cuts of [[0, 1, 300], [0, 77, 78, 200, 300]]) {
    same(joinTiles(cuts.slice(1).map((to, k) => traceRays(engine, scene, bundle, scale, cuts[k], to)), spectrum.length));
  }
  same(await localBackend(new EngineCache())({ scene, spectrum, bundle }));
  expect(tilesOf(600)).toEqual([[0, 256], [256, 512], [512, 600]]);
});

test('an engine serves every scene of its structure, and the cache knows structures apart', () => {
  const cache = new EngineCache();
  const scene = sceneOf(base);
  const engine = cache.get(scene, spectrum);
  const other = sceneOf({ ...base, inclination: 70, layers: ['{model: exponential-disc, name: c, normalisation: 2e-5 cm^-3, radius: 7 kpc, height: 1 kpc}'] });
  expect(cache.get(other, spectrum)).toBe(engine);
  expect(cache.get(sceneOf({ ...base, field: [spiral] }), spectrum)).not.toBe(engine);
  expect(cache.get(scene, frequencies(1e9))).not.toBe(engine);
  expect(cache.get(sceneOf({ ...base, turbulence: '{rms: 3 uG, cell: 0.05 kpc}' }), spectrum)).not.toBe(engine);
  const bundle = { northKpc: Float64Array.from(north), eastKpc: Float64Array.from(east) };
  const reused = traceRays(engine, other, bundle, findMapScale(engine, other, bundle));
  expect(reused.I).toEqual(follow(other, spectrum, north, east).I);
});

test('progress is told and a stop is heard', async () => {
  const scene = sceneOf({ ...base, tolerance: 1e-2 });
  const bundle = { northKpc: new Float64Array(600).fill(20), eastKpc: new Float64Array(600) };
  const told: number[] = [];
  await localBackend()({ scene, spectrum, bundle }, { onProgress: (done) => told.push(done) });
  expect(told).toEqual([256, 512, 600]);
  const stop = new AbortController();
  const job = localBackend()({ scene, spectrum, bundle }, { onProgress: () => stop.abort(), signal: stop.signal });
  await expect(job).rejects.toThrow(/abort/i);
});

test('declared edges of a formula are breaks of every ray, so that jumps cost nothing', () => {
  const density = (edges: string): string => `{model: formula, name: c, parameters: {n: 1e-5 cm^-3, h: 0.37 kpc, w: 4.3 kpc}, density: "abs(z) < h ? (r < w ? 2*n : n) : 0"${edges}}`;
  const parts = { ...base, inclination: 55, field: ['{model: uniform, x: 4 uG, y: 1 uG, z: 2 uG}'], electrons: [], tolerance: 1e-9 };
  const withEdges = sceneOf({ ...parts, layers: [density(', edges: {z: [h, "-h"], r: [w]}')] });
  const without = sceneOf({ ...parts, layers: [density('')] });
  const [a, b] = [withEdges, without].map((scene) => follow(scene, frequencies(1.4e9), north, east));
  // The chord through both steps in closed form: brightness over that of the central ray.
  const { sinI, cosI } = rayGeometry(withEdges, { edges: { zKpc: [], rKpc: [] }, longestPanelKpc: Infinity });
  const pa = (25 * Math.PI) / 180;
  const lengths = north.map((n, k) => {
    const [major, minor] = [n * Math.cos(pa) + east[k] * Math.sin(pa), east[k] * Math.cos(pa) - n * Math.sin(pa)];
    const [low, high] = [-0.37, 0.37].map((z) => (z - minor * sinI) / cosI);
    const square = 4.3 ** 2 - major ** 2;
    const middle = (minor * cosI) / sinI;
    const half = square > 0 ? Math.sqrt(square) / sinI : 0;
    const inner = Math.max(0, Math.min(high, middle + half) - Math.max(low, middle - half));
    const rim = Math.sqrt(15 ** 2 - major ** 2) / sinI;
    return Math.max(0, Math.min(high, middle + rim) - Math.max(low, middle - rim)) + inner;
  });
  const [central] = follow(withEdges, frequencies(1.4e9), [0], [0]).I;
  const centralLength = (2 * 2 * 0.37) / cosI;
  a.I.forEach((I, k) => expect(Math.abs(I / central - lengths[k] / centralLength)).toBeLessThan(1e-12 * centralLength));
  expect(b.samples).toBeGreaterThan(3 * a.samples);
});

test('breaks rise, lie within the volume and hold every declared edge that a ray crosses', () => {
  const geometry = { sinI: Math.sin(1), cosI: Math.cos(1), radiusKpc: 10, heightKpc: 4, longestPanelKpc: Infinity, edges: { zKpc: [1.5, -0.5, 99], rKpc: [3, 50] } };
  const breaks = new Float64Array(128);
  const count = findBreaks(geometry, 2, 0.7, breaks);
  const list = [...breaks.slice(0, count)];
  expect(list).toEqual([...list].sort((p, q) => p - q));
  const height = (s: number): number => 0.7 * geometry.sinI + s * geometry.cosI;
  const radius = (s: number): number => Math.hypot(2, 0.7 * geometry.cosI - s * geometry.sinI);
  for (const z of [1.5, -0.5, 0]) expect(Math.min(...list.map((s) => Math.abs(height(s) - z)))).toBeLessThan(1e-12);
  const crossings = list.filter((s) => Math.abs(radius(s) - 3) < 1e-12);
  expect(crossings).toHaveLength(2);
  for (const s of list) expect(Math.abs(height(s)) <= 4 + 1e-12 && radius(s) <= 10 + 1e-12).toBe(true);
});

test('many edges do not overflow, and edges that coincide are one', () => {
  const geometry = { sinI: 0.6, cosI: 0.8, radiusKpc: 10, heightKpc: 4, longestPanelKpc: Infinity, edges: { zKpc: Array.from({ length: 300 }, (_, k) => k / 100), rKpc: [] } };
  const breaks = new Float64Array(128);
  expect(findBreaks(geometry, 1, 1, breaks)).toBeLessThanOrEqual(128);
  const twice = { ...geometry, edges: { zKpc: [1, 1, 1 + 1e-14], rKpc: [] } };
  const once = { ...geometry, edges: { zKpc: [1], rKpc: [] } };
  expect(findBreaks(twice, 1, 1, breaks)).toBe(findBreaks(once, 1, 1, breaks));
});

test.each([
  ['electrons', /the Faraday depth of the ray at north .* kpc, east .* kpc is not a number/],
  ['layers', /the emission of the ray at north/],
] as const)('a formula of %s that is no number stops the run and names the ray', (where, message) => {
  const density = '{model: formula, name: bad, parameters: {n: 1e-5 cm^-3}, density: "n*sqrt(9 - r)"}';
  const scene = sceneOf({ ...base, [where]: [density] });
  expect(() => follow(scene, spectrum, [0, 8], [0, 4])).toThrow(NotANumberError);
  expect(() => follow(scene, spectrum, [0, 8], [0, 4])).toThrow(message);
});

test('rays picked for the scale are spread evenly, each once', () => {
  const picked = pickRays(10_000);
  expect(new Set(picked).size).toBe(picked.length);
  const quarter = picked.filter((index) => index < 2500).length / picked.length;
  expect(Math.abs(quarter - 0.25)).toBeLessThan(0.02);
  expect(pickRays(5)).toEqual([0, 1, 2, 3, 4]);
});

test('the rule of a panel has order 16, and its depths are exact for polynomials of degree 7', () => {
  const f = (x: number): number => Math.exp(Math.sin(3 * x));
  const composite = (panels: number): number => {
    let sum = 0;
    for (let k = 0; k < panels; k++) panelRule.nodes.forEach((node, i) => (sum += (panelRule.weights[i] / panels) * f((2 * k + 1 + node) / panels)));
    return sum;
  };
  const exact = composite(64);
  const errors = [1, 2, 4].map((panels) => Math.abs(composite(panels) - exact));
  // Order of convergence: halving a panel gains 2^16 once it is resolved.
  expect(Math.log2(errors[1] / errors[2])).toBeGreaterThan(14);
  expect(Math.log2(errors[0] / errors[1])).toBeGreaterThan(8);
  for (let i = 0; i < panelNodes; i++) {
    let depth = 0;
    for (let j = 0; j < panelNodes; j++) depth += panelRule.toNearEnd[i * panelNodes + j] * 8 * panelRule.nodes[j] ** 7;
    expect(Math.abs(depth - (1 - panelRule.nodes[i] ** 8))).toBeLessThan(1e-13);
  }
});

test('a tighter tolerance is met, and costs ever less per digit', () => {
  const tolerances = [1e-2, 1e-4, 1e-6, 1e-8, 1e-10];
  const results = [...tolerances, 1e-12].map((tolerance) => follow(sceneOf({ ...base, tolerance }), spectrum, north, east));
  const best = results[results.length - 1];
  tolerances.forEach((tolerance, step) => {
    for (let f = 0; f < 3; f++) {
      const slice = (list: Float64Array): Float64Array => list.subarray(f * north.length, (f + 1) * north.length);
      const scaleI = Math.max(...slice(best.I));
      const scaleP = Math.max(1e-3 * scaleI, ...slice(best.Q).map((Q, k) => Math.hypot(Q, slice(best.U)[k])));
      const error = Math.max(...slice(best.I).map((I, k) => Math.max(
        Math.abs(slice(results[step].I)[k] - I) / scaleI,
        Math.abs(slice(results[step].Q)[k] - slice(best.Q)[k]) / scaleP,
        Math.abs(slice(results[step].U)[k] - slice(best.U)[k]) / scaleP,
      )));
      expect(error).toBeLessThan(tolerance);
    }
  });
  // Sixteenth order: eight more digits multiply the samples by far less than a rule of low order would (10^4 at order 2).
  expect(results[4].samples).toBeLessThan(16 * results[1].samples);
});
