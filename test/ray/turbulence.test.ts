import { expect, test } from 'vitest';
import { drawTurbulence } from '../../src/field/turbulence.ts';
import { withDrawnField } from '../../src/ray/grids.ts';
import { EngineCache, localBackend } from '../../src/ray/job.ts';
import { measureDivergence, probeScene, randomPoints } from '../../src/ray/probe.ts';
import { measureSymmetry } from '../../src/ray/symmetry.ts';
import type { RayResult } from '../../src/ray/types.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { scenePath } from '../../src/scene/paths.ts';
import { findSplit } from '../../src/scene/resolved-turbulence.ts';
import type { Scene } from '../../src/scene/types.ts';
import { randomStream } from '../../src/math/random.ts';
import { frequencies } from './scenes.ts';

interface Parts {
  readonly turbulence: string;
  readonly field?: string;
  readonly density?: number;
  readonly height?: number;
  readonly inclination?: number;
  readonly index?: number;
  readonly pixel?: string;
}

/** A uniform slab of half thickness `height` whose whole volume emits. */
function slab({ turbulence, field = '', density = 0.03, height = 1, inclination = 0, index = 3, pixel = '1 pc' }: Parts): Scene {
  return parseScene(
    `
gyrelight: 1
galaxy: {distance: 10 Mpc, inclination: ${inclination} deg, positionAngle: 0 deg, volume: {radius: 6 kpc, height: ${height} kpc}}
field: [${field}]
thermalElectrons: [{model: slab, name: gas, density: ${density} cm^-3, halfThickness: 100 kpc}]
cosmicRays: {index: ${index}, layers: [{model: slab, normalisation: 1e-5 cm^-3, halfThickness: 100 kpc}]}
turbulence: {${turbulence}}
observation: {image: {pixels: 8, pixel: ${pixel}}, bands: [{name: L, at: [1.4 GHz]}]}
numerics: {tolerance: 1e-3, seed: 3}
`,
    's.yaml',
  );
}

const rays = 250;
const bundle = (() => {
  const stream = randomStream(9, 'rays');
  return { northKpc: Float64Array.from({ length: rays }, () => 4 * stream.uniform() - 2), eastKpc: Float64Array.from({ length: rays }, () => 4 * stream.uniform() - 2) };
})();

const backend = localBackend(new EngineCache());
const trace = (scene: Scene, ...hz: number[]): Promise<RayResult> => backend({ scene, spectrum: frequencies(...hz), bundle });
const realisation = (scene: Scene, value: number): Scene => scenePath(scene, 'turbulence.resolved.realisation').set(scene, value);
const mean = (values: ArrayLike<number>): number => Array.from(values).reduce((sum, value) => sum + value, 0) / values.length;

test('the depth of a slab scatters as the random walk with the solenoidal correlation length says, resolved and unresolved together', async () => {
  // Path and box are 4 kpc; checks.json 9.sigRM: sigma = K n_e b_par sqrt(L d), d = 0.3 L_max for endless Kolmogorov spectra (9.Lc, third number).
  const scene = slab({ turbulence: 'resolved: {rms: 3 uG, outerScale: 0.8 kpc, box: 4 kpc, cells: 64}', height: 2 });
  const split = findSplit(scene);
  if (!split) throw new Error('no split');
  let variance = 0;
  const draws = 6;
  for (let k = 0; k < draws; k++) variance += mean((await trace(realisation(scene, k), 5e9)).faradayDepth.map((depth) => depth * depth)) / draws;
  const walk = (rmsUG: number, cellKpc: number): number => (0.8119011641650427 * 0.03 * rmsUG) ** 2 * 4000 * (cellKpc * 1000);
  // Resolved: (3/2) L_c of 9.Lc for the range that is drawn.
  const [a, r] = [5 / 3, split.shortestKpc / 0.8];
  const drawn = (1.5 * 0.4 * ((a - 1) / a) * (1 - r ** a)) / (1 - r ** (a - 1));
  // 6 boxes of 5² independent lines: 12 per cent of a variance.
  expect(Math.abs(variance / walk(split.resolvedUG, drawn) - 1)).toBeLessThan(0.3);
  // The two parts make the whole, exactly.
  const whole = walk(3, 0.3 * 0.8);
  expect(Math.abs((walk(split.resolvedUG, drawn) + walk(split.restUG, split.restCellKpc)) / whole - 1)).toBeLessThan(1e-12);
  expect(Math.abs(Math.hypot(split.resolvedUG, split.restUG) / 3 - 1)).toBeLessThan(1e-12);
}, 60000);

test('mean I and P without rotation are those of the unresolved formula: Burn 1966 for p = 3', async () => {
  // 5.wi: emissivity ∝ B_⊥², p/p0 = 1/(1 + 2 q²/3), q = b/B_⊥ with b the rms of all three components.
  const scene = slab({ turbulence: 'resolved: {rms: 3 uG, outerScale: 0.5 kpc, box: 4 kpc, cells: 64}', field: '{model: uniform, x: 4 uG, y: 0 uG, z: 0 uG}', density: 1e-9 });
  const regular = slab({ turbulence: '', field: '{model: uniform, x: 4 uG, y: 0 uG, z: 0 uG}', density: 1e-9 });
  let [I, P] = [0, 0];
  for (let k = 0; k < 4; k++) {
    const seen = await trace(realisation(scene, k), 5e9);
    I += mean(seen.I) / 4;
    P += Math.hypot(mean(seen.Q), mean(seen.U)) / 4;
  }
  const alone = await trace(regular, 5e9);
  const q2 = (3 * 9) / 16;
  // 4 boxes of 8 × 8 × 4 cells seen by 250 rays: 2 per cent.
  expect(Math.abs(P / I / (mean(alone.Q.map(Math.abs)) / mean(alone.I)) / (1 / (1 + (2 * q2) / 3)) - 1)).toBeLessThan(0.08);
  expect(Math.abs(I / mean(alone.I) / (1 + (2 * 9) / 16) - 1)).toBeLessThan(0.08);
}, 60000);

test('mean P with rotation agrees with unresolved turbulence where cells turn little and are many', async () => {
  // Where λ² K n_e σ d < 0.2 a cell and path ≫ d (design, "Must be shown"). d = 0.3 outer scale = 75 pc, path 2 kpc.
  const field = '{model: uniform, x: 4 uG, y: 0 uG, z: 0 uG}';
  const resolved = slab({ turbulence: 'resolved: {rms: 1 uG, outerScale: 0.25 kpc, box: 2 kpc, cells: 64}', field, height: 1, density: 0.1 });
  const unresolved = slab({ turbulence: 'unresolved: {rms: 1 uG, cell: 0.075 kpc}', field, height: 1, density: 0.1 });
  const hz = 1.5e9;
  const turnOfCell = (299792458 / hz) ** 2 * 0.8119 * 0.1 * 1 * 75;
  expect(turnOfCell).toBeLessThan(0.25);
  let [q, u] = [0, 0];
  const draws = 4;
  for (let k = 0; k < draws; k++) {
    const seen = await trace(realisation(resolved, k), hz);
    q += mean(seen.Q) / draws;
    u += mean(seen.U) / draws;
  }
  const formula = await trace(unresolved, hz);
  const wanted = Math.hypot(mean(formula.Q), mean(formula.U));
  const undamped = mean(formula.emittedP);
  expect(wanted / undamped).toBeLessThan(0.85);
  expect(Math.hypot(q - mean(formula.Q), u - mean(formula.U)) / undamped).toBeLessThan(0.04);
}, 60000);

test('a random field alone depolarizes as N cells do: with the root of the path', async () => {
  // 5.N: rms p = p0/sqrt(N) (Burn 1966); N grows with the path. Four times the path: half of p.
  const shares: number[] = [];
  for (const height of [0.5, 2]) {
    const scene = slab({ turbulence: 'resolved: {rms: 3 uG, outerScale: 0.4 kpc, box: 4 kpc, cells: 64, smallest: 0.15 kpc}', density: 1e-9, height });
    let [p2, i2] = [0, 0];
    for (let k = 0; k < 3; k++) {
      const seen = await trace(realisation(scene, k), 5e9);
      p2 += mean(seen.Q.map((Q, ray) => Q * Q + seen.U[ray] ** 2));
      i2 += mean(seen.I) ** 2;
    }
    shares.push(Math.sqrt(p2 / i2));
  }
  expect(Math.abs(shares[0] / shares[1] / 2 - 1)).toBeLessThan(0.12);
}, 60000);

test('modulated turbulence is free of divergence, and of the rms that its envelope gives it', () => {
  const envelopes = ['profile: "exp(-r/8)/(1 + z^2)"', 'follows: disc', 'follows: gas'];
  const field = '{model: axisymmetric-spiral, name: disc, strength: 5 uG, pitch: -20 deg, radius: 8 kpc, innerRadius: 1 kpc, height: 0.6 kpc, closure: 4 kpc}';
  for (const envelope of envelopes) {
    const scene = slab({ turbulence: `resolved: {rms: 3 uG, outerScale: 0.3 kpc, box: 2 kpc, cells: 32, ${envelope}}`, field });
    const all = measureDivergence(scene);
    expect(all.map(({ name }) => name)).toEqual(['disc', 'resolved turbulence']);
    // Issue: every new field below 1e-6.
    expect(all[1].largest).toBeLessThan(1e-9);
  }
  const scene = slab({ turbulence: `resolved: {rms: 3 uG, outerScale: 0.3 kpc, box: 2 kpc, cells: 32, profile: "exp(-r/8)/(1 + z^2)"}` });
  const points = randomPoints(scene, 6000);
  const { Bx, By, Bz } = probeScene(scene, points);
  const ratios = Bx.map((bx, k) => ((bx * bx + By[k] ** 2 + Bz[k] ** 2) / 3 / (findSplit(scene)?.resolvedUG ?? 1) ** 2) * (Math.exp(Math.hypot(points.x[k], points.y[k]) / 8) * (1 + points.z[k] ** 2)) ** 2);
  // The gradient of the envelope adds (outer scale over envelope's scale)²; box of 7 outer scales.
  expect(Math.abs(Math.sqrt(mean(ratios)) - 1)).toBeLessThan(0.08);
});

test('n_e fluctuates as asked and keeps its mean', () => {
  const scene = slab({ turbulence: 'resolved: {rms: 3 uG, outerScale: 0.3 kpc, box: 3 kpc, cells: 64, electrons: {rms: 0.6, correlation: -0.5}}' });
  const { ne } = probeScene(scene, randomPoints(scene, 20000));
  const average = mean(ne);
  expect(Math.abs(average / 0.03 - 1)).toBeLessThan(0.03);
  expect(Math.abs(Math.sqrt(mean(ne.map((n) => (n - average) ** 2))) / average / 0.6 - 1)).toBeLessThan(0.1);
  expect(Math.min(...ne)).toBeGreaterThan(0);
});

test('back ends agree; fields drawn beforehand, strengths and seeds count as they should', async () => {
  const scene = slab({ turbulence: 'resolved: {rms: 3 uG, outerScale: 0.5 kpc, box: 2 kpc, cells: 32, electrons: {rms: 0.4}}, unresolved: {rms: 1 uG, cell: 10 pc}', inclination: 50 });
  const one = { northKpc: bundle.northKpc.slice(0, 40), eastKpc: bundle.eastKpc.slice(0, 40) };
  const spectrum = frequencies(1.4e9, 5e9);
  const [wasm, javascript, beforehand] = await Promise.all([
    localBackend(new EngineCache('wasm'))({ scene, spectrum, bundle: one }),
    localBackend(new EngineCache('javascript'))({ scene, spectrum, bundle: one }),
    localBackend(new EngineCache('wasm'))({ scene: withDrawnField(scene), spectrum, bundle: one }),
  ]);
  const size = Math.max(...wasm.I);
  for (const quantity of ['I', 'Q', 'U'] as const) {
    wasm[quantity].forEach((value, k) => expect(Math.abs(value - javascript[quantity][k])).toBeLessThan(1e-8 * size));
    expect(beforehand[quantity]).toEqual(wasm[quantity]);
  }
  const drawn = withDrawnField(scene);
  // Another realisation of a scene whose field was drawn is drawn anew.
  const points = randomPoints(scene, 5);
  expect(probeScene(realisation(drawn, 1), points).Bx).toEqual(probeScene(realisation(scene, 1), points).Bx);
  expect(probeScene(drawn, points).Bx).not.toEqual(probeScene(realisation(drawn, 1), points).Bx);
  // rms is linear.
  const doubled = scenePath(scene, 'turbulence.resolved.rms').set(drawn, 6);
  probeScene(doubled, points).Bx.forEach((b, k) => expect(Math.abs(b - 2 * probeScene(scene, points).Bx[k])).toBeLessThan(1e-12));
  expect(doubled.drawn?.grids).toBe(drawn.drawn?.grids);
  expect(measureSymmetry(scene)).toMatchObject({ axisymmetric: false });
});

test('a grid that is shared lies in shared memory, so that threads do not copy it', () => {
  const { potential } = drawTurbulence({ seed: 1, realisation: 0, cells: 16, slope: 11 / 3, first: 2, last: 5, verticalRatio: 1 });
  expect(potential[0].coefficients.buffer).toBeInstanceOf(SharedArrayBuffer);
});

const base = 'rms: 3 uG, outerScale: 0.5 kpc, box: 2 kpc, cells: 64';
test.each([
  [base.replace('0.5 kpc', '3 kpc'), /s\.yaml:\d+:\d+: turbulence\.resolved\.outerScale: the outer scale, 3 kpc, is larger than the box of 2 kpc/],
  [base.replace('0.5 kpc', '0.1 kpc'), /cannot be resolved, for the grid of 64 cells in 2 kpc carries waves from 0\.0938 kpc, 3 cells: more cells, a smaller box, or "unresolved"/],
  [`${base}, smallest: 0.4 kpc`, /cannot be resolved, for "smallest" is 0\.400 kpc/],
  [base.replace('64', '60'), /60 is not allowed: cells along a side of the box are 16, 32, 64, 128, 256/],
  [`${base}, slope: 3`, /3 is not allowed, slope is above 3 and at most 8: fields of such spectra have no finite rms/],
  [`${base}, slope: steep`, /"steep" is not allowed/],
  [`${base}, verticalRatio: 4`, /verticalRatio: 4 is outside 0\.48 to 2\.8/],
  [`${base}, follows: gsa`, /nothing is named "gsa" \(did you mean "gas"\?\)/],
  [`${base}, follows: gas, profile: "1"`, /beside "follows"/],
  [`${base}, profile: "exp(-q)"`, /unknown name "q"/],
  [`${base}, electrons: {rms: 0.5, correlation: 2}`, /correlation: 2 is outside -1 to 1/],
])('%s is refused in words', (turbulence, message) => {
  expect(() => slab({ turbulence: `resolved: {${turbulence}}` })).toThrow(message);
});

test('pixels that are coarser than the turbulence are named; 11/3 is a number', () => {
  expect(() => slab({ turbulence: `resolved: {${base}}`, pixel: '300 pc' })).toThrow('two pixels of the image are 0.600 kpc: smaller pixels');
  const scene = slab({ turbulence: `resolved: {${base}, slope: 11/3}`, pixel: '100 pc' });
  expect(scene.turbulence.resolved).toMatchObject({ slope: 11 / 3, smallestKpc: expect.closeTo(0.2, 9) as number });
  expect(() => scenePath(scene, 'turbulence.resolved.outerScale').set(scene, 0.1)).toThrow('not between the shortest wave');
});
