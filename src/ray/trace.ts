import { compileJavaScript, type Kernel } from '../formula/javascript.ts';
import { steadySineCosine } from '../math/steady.ts';
import { hasWasmSimd } from '../formula/wasm/available.ts';
import { compileWasm } from '../formula/wasm/kernel.ts';
import type { Scene } from '../scene/types.ts';
import { compileIntegrand, tableShape, type Integrand, type IntegrandInputs, type SpectralPoint } from './integrand.ts';
import type { RayGeometry } from './path.ts';
import { exactSineCosine } from './scene-graph.ts';
import { brightnessPerKpc, intrinsicPolarization, wavelengthSquared } from './synchrotron.ts';
import { InputError } from '../units/input-error.ts';
import { compileTangents, type TangentIntegrand } from './tangent-integrand.ts';
import { makeTangentSums } from './tangent-sums.ts';
import { firstTangents, makeRayTangents } from './tangent-planes.ts';
import { tangentWriter } from './tangent-trace.ts';
import { TangentTracer } from './tangent-transfer.ts';
import { mostSamples, statedError, type Accuracy } from './accuracy.ts';
import { makeRaySums, type RaySums } from './ray-sums.ts';
import { RayTracer } from './transfer.ts';
import type { RayBundle, RayResult } from './types.ts';
import { WasmTransfer, type Derivatives } from './wasm-tracer.ts';

/** What follows rays: WebAssembly SIMD code, or generated JavaScript. */
export type BackEnd = 'wasm' | 'javascript';

/**
 * A scene ready to be looked at in a list of frequencies. It may be reused for scenes that differ
 * in numbers only.
 */
export interface RayEngine {
  readonly integrand: Integrand;
  readonly spectrum: readonly SpectralPoint[];
  readonly backEnd: BackEnd;
  /** The integrand at any points; compiled when first asked for. */
  kernel(): Kernel;
  /** The code that follows rays where the back end is WebAssembly. */
  transfer(): WasmTransfer;
  /** What differentiates rays beside following them, where that is asked for. */
  readonly tangents?: TangentEngine;
}

/** Derivatives of a scene's rays, ready to be followed. */
export interface TangentEngine {
  readonly integrand: TangentIntegrand;
  kernel(): Kernel;
  /** The code that follows rays and differentiates them. */
  transfer(): WasmTransfer;
}

/**
 * Compiles a scene for a spectrum: to WebAssembly where the host has its SIMD instructions, unless told
 * otherwise; with derivatives by the numbers at some paths that `findTangentParameter` knows.
 */
export function makeRayEngine(
  scene: Scene,
  spectrum: readonly SpectralPoint[],
  backEnd: BackEnd = hasWasmSimd() ? 'wasm' : 'javascript',
  tangentPaths: readonly string[] = [],
): RayEngine {
  const integrand = compileIntegrand(scene, spectrum);
  let kernel: Kernel | undefined;
  let transfer: WasmTransfer | undefined;
  return {
    integrand,
    spectrum,
    backEnd,
    kernel: () => (kernel ??= backEnd === 'wasm' ? compileWasm(integrand.program, tableShape) : compileJavaScript(integrand.program)),
    transfer: () => (transfer ??= new WasmTransfer(integrand, wavelengthsOf(spectrum))),
    ...(tangentPaths.length > 0 && { tangents: makeTangentEngine(scene, spectrum, backEnd, integrand, tangentPaths) }),
  };
}

function makeTangentEngine(scene: Scene, spectrum: readonly SpectralPoint[], backEnd: BackEnd, values: Integrand, paths: readonly string[]): TangentEngine {
  const integrand = compileTangents(scene, spectrum, paths);
  let kernel: Kernel | undefined;
  let transfer: WasmTransfer | undefined;
  return {
    integrand,
    kernel: () => (kernel ??= backEnd === 'wasm' ? compileWasm(integrand.program, tableShape) : compileJavaScript(integrand.program)),
    transfer: () => (transfer ??= new WasmTransfer(values, wavelengthsOf(spectrum), integrand)),
  };
}

function wavelengthsOf(spectrum: readonly SpectralPoint[]): Float64Array {
  return Float64Array.from(spectrum, (point) => wavelengthSquared(point.frequencyHz));
}

/** Rays followed to set the scale that `tolerance` is relative to. */
const scaleRays = 192;

/** Largest I and the scale of Q and U per frequency over a few of a bundle's rays, raw units. */
export type MapScale = Pick<Accuracy, 'scaleI' | 'scaleP'>;

/**
 * Finds the scale of `tolerance` (physics.md section 3) from evenly picked rays of a bundle: the
 * same for any split of the bundle, never larger than the scale of the whole map, and not set by a
 * few rays through a nearly singular centre.
 */
export function findMapScale(engine: RayEngine, scene: Scene, bundle: RayBundle): MapScale {
  const picked = pickRays(bundle.northKpc.length);
  const count = engine.spectrum.length;
  const coarse = { tolerance: Infinity, scaleI: new Float64Array(count).fill(1), scaleP: new Float64Array(count).fill(1) };
  const guess = new Float64Array(count);
  followAll(engine, scene, bundle, picked, coarse, (_, sums) => keepLargest(guess, sums.total));
  const dark = guess.every((value) => value === 0);
  if (dark) return coarse;
  const intrinsic = intrinsicPolarization(scene.cosmicRays.index);
  const loose = { tolerance: 1e-2, scaleI: guess, scaleP: guess.map((value) => (1e-3 * value) / intrinsic) };
  const brightness = { I: seriesOf(count), P: seriesOf(count) };
  followAll(engine, scene, bundle, picked, loose, (_, sums) => {
    for (let k = 0; k < count; k++) {
      brightness.I[k].push(sums.total[k]);
      brightness.P[k].push(Math.hypot(sums.cosine[k], sums.sine[k]));
    }
  });
  const scaleI = Float64Array.from(brightness.I, typicalLargest);
  const scaleP = Float64Array.from(brightness.P, (values, k) => Math.max(typicalLargest(values), (1e-3 * scaleI[k]) / intrinsic));
  return { scaleI, scaleP };
}

/** A nearly singular centre may not set the scale for the whole galaxy: this many times the bright rays' level is the most. */
const mostAboveBright = 5;
/** Nor may faint sky around a bright galaxy: the scale is at least this share of the largest, or no panel would ever be fine enough. */
const leastOfLargest = 1e-3;

/**
 * The largest of a few rays' values, but no more than a few times their 90 % point, unless that is
 * almost nothing beside it; empty rays do not count.
 */
export function typicalLargest(values: readonly number[]): number {
  const sorted = values.filter((value) => value > 0).sort((a, b) => a - b);
  if (sorted.length === 0) return 0;
  const largest = sorted[sorted.length - 1];
  return Math.min(largest, Math.max(leastOfLargest * largest, mostAboveBright * sorted[Math.floor(0.9 * (sorted.length - 1))]));
}

function seriesOf(count: number): number[][] {
  return Array.from({ length: count }, () => []);
}

/**
 * Follows the rays `from` ≤ index < `to` of a bundle to the scene's tolerance. The result has fewer
 * rays where they have taken `budget` samples before the last: it ends behind the ray that did.
 * Throws InputError where a ray has no end.
 */
export function traceRays(engine: RayEngine, scene: Scene, bundle: RayBundle, scale: MapScale, from = 0, to = bundle.northKpc.length, budget = Infinity): RayResult {
  const rays = to - from;
  const result = makeResult(engine.spectrum.length, rays);
  const toJansky = spectralFactors(engine, scene);
  const intrinsic = intrinsicPolarization(scene.cosmicRays.index);
  const turn = 2 * scene.galaxy.positionAngle;
  const [sine, cosine] = steadySineCosine(turn);
  const accuracy = { tolerance: scene.numerics.tolerance, ...scale };
  const indices = Array.from({ length: rays }, (_, k) => from + k);
  const { tangents } = engine;
  const derivatives = tangents && makeDerivatives(tangents.integrand, scene);
  const slopes = tangents && makeRayTangents(tangents.integrand.parameters.length, engine.spectrum.length, rays);
  const writeSlopes = tangents && tangentWriter(tangents.integrand, scene, engine.spectrum.map(({ frequencyHz }) => frequencyHz), rays);
  let [samples, done] = [0, 0];
  followAll(engine, scene, bundle, indices, accuracy, (index, sums) => {
    const ray = index - from;
    for (let k = 0; k < engine.spectrum.length; k++) {
      const at = k * rays + ray;
      const polarized = toJansky[k] * intrinsic;
      result.I[at] = toJansky[k] * sums.total[k];
      // From the frame of the major axis to that of north.
      result.Q[at] = polarized * (cosine * sums.cosine[k] - sine * sums.sine[k]);
      result.U[at] = polarized * (sine * sums.cosine[k] + cosine * sums.sine[k]);
      result.heightQ[at] = polarized * (cosine * sums.heightCosine[k] - sine * sums.heightSine[k]);
      result.heightU[at] = polarized * (sine * sums.heightCosine[k] + cosine * sums.heightSine[k]);
      result.emittedP[at] = polarized * sums.emitted[k];
      result.error[k] = Math.max(result.error[k], statedError(accuracy.tolerance, sums.error[k]));
    }
    result.faradayDepth[ray] = sums.faradayDepth;
    samples += sums.samples;
    done++;
    refuseNaN(sums, bundle, index);
    if (derivatives && slopes) writeSlopes?.(ray, sums, derivatives.sums, slopes);
  }, budget, derivatives);
  const whole = { ...result, samples, ...(slopes && { tangents: slopes }) };
  return done < rays ? firstRays(whole, done) : whole;
}

/** A result without the rays behind the first `count`. */
function firstRays(result: RayResult, count: number): RayResult {
  const rays = result.faradayDepth.length;
  const cut = (planes: Float64Array): Float64Array => {
    const kept = new Float64Array((planes.length / rays) * count);
    for (let plane = 0; plane * rays < planes.length; plane++) kept.set(planes.subarray(plane * rays, plane * rays + count), plane * count);
    return kept;
  };
  const { I, Q, U, heightQ, heightU, emittedP, faradayDepth, tangents } = result;
  return {
    ...result,
    I: cut(I), Q: cut(Q), U: cut(U), heightQ: cut(heightQ), heightU: cut(heightU), emittedP: cut(emittedP), faradayDepth: cut(faradayDepth),
    ...(tangents && { tangents: firstTangents(tangents, rays, count) }),
  };
}

/** How a scene's galaxy is turned and bounded, and where its integrand wants panels to end. */
export function rayGeometry(scene: Scene, { edges, longestPanelKpc }: Pick<IntegrandInputs, 'edges' | 'longestPanelKpc'>): RayGeometry {
  const [sinI, cosI] = exactSineCosine(scene.galaxy.inclination);
  const { radiusKpc, heightKpc } = scene.galaxy.volume;
  return { sinI, cosI, radiusKpc, heightKpc, edges, longestPanelKpc };
}

function followAll(
  engine: RayEngine,
  scene: Scene,
  bundle: RayBundle,
  indices: readonly number[],
  accuracy: Accuracy,
  take: (index: number, sums: RaySums) => void,
  budget = Infinity,
  derivatives?: Derivatives,
): void {
  const inputs = engine.integrand.inputs(scene);
  const geometry = rayGeometry(scene, inputs);
  const [sinPA, cosPA] = exactSineCosine(scene.galaxy.positionAngle);
  const sums = makeRaySums(engine.spectrum.length);
  const place = (index: number): readonly [major: number, minor: number] => {
    const [north, east] = [bundle.northKpc[index], bundle.eastKpc[index]];
    return [north * cosPA + east * sinPA, east * cosPA - north * sinPA];
  };
  if (engine.backEnd === 'wasm') {
    const rays = new Float64Array(2 * indices.length);
    indices.forEach((index, k) => rays.set(place(index), 2 * k));
    const takeNext = (k: number): void => {
      refuseEndless(sums, bundle, indices[k], accuracy.tolerance);
      take(indices[k], sums);
    };
    const transfer = derivatives && engine.tangents ? engine.tangents.transfer() : engine.transfer();
    transfer.follow(inputs, geometry, accuracy, rays, sums, takeNext, budget, derivatives);
    return;
  }
  const wavelengthM2 = wavelengthsOf(engine.spectrum);
  const { tangents } = engine;
  const watcher = derivatives && tangents && new TangentTracer(tangents.integrand, tangents.kernel(), derivatives.inputs, geometry, wavelengthM2, derivatives.sums);
  const tracer = new RayTracer(engine.integrand, engine.kernel(), inputs, geometry, wavelengthM2, accuracy, watcher);
  let left = budget;
  for (const index of indices) {
    if (left <= 0) return;
    tracer.follow(...place(index), sums);
    refuseEndless(sums, bundle, index, accuracy.tolerance);
    left -= sums.samples;
    take(index, sums);
  }
}

/** Indices spread evenly over a bundle by the golden ratio, each once. */
export function pickRays(count: number): readonly number[] {
  if (count <= scaleRays) return Array.from({ length: count }, (_, k) => k);
  const golden = (Math.sqrt(5) - 1) / 2;
  const picked = new Set<number>([Math.floor(count / 2)]);
  for (let k = 0; picked.size < scaleRays; k++) picked.add(Math.floor(((k * golden) % 1) * count));
  return [...picked].sort((a, b) => a - b);
}

function makeDerivatives(integrand: TangentIntegrand, scene: Scene): Derivatives {
  return { inputs: integrand.inputs(scene), sums: makeTangentSums(integrand.groupOf.length, integrand.parameters.length) };
}

function spectralFactors(engine: RayEngine, scene: Scene): Float64Array {
  return Float64Array.from(engine.spectrum, (point) => brightnessPerKpc(scene.cosmicRays.index, point.frequencyHz));
}

function makeResult(frequencies: number, rays: number): Omit<RayResult, 'samples'> {
  const cube = (): Float64Array => new Float64Array(frequencies * rays);
  return {
    I: cube(),
    Q: cube(),
    U: cube(),
    heightQ: cube(),
    heightU: cube(),
    emittedP: cube(),
    faradayDepth: new Float64Array(rays),
    error: new Float64Array(frequencies),
  };
}

function keepLargest(largest: Float64Array, values: Float64Array): void {
  for (let k = 0; k < largest.length; k++) largest[k] = Math.max(largest[k], values[k]);
}

/** Stops the run where a ray was given up, naming it and what to change. */
function refuseEndless(sums: RaySums, bundle: RayBundle, index: number, tolerance: number): void {
  if (sums.samples <= mostSamples) return;
  throw new InputError(
    `the ray at ${placeOf(bundle, index)} is not resolved to a tolerance of ${tolerance} by ${mostSamples} samples: a field or density changes too fast along it; ` +
      'look for a formula that oscillates within parsecs or jumps where no edge is declared (edges of its model), or take a larger numerics.tolerance',
  );
}

function placeOf({ northKpc, eastKpc }: RayBundle, index: number): string {
  return `north ${northKpc[index].toPrecision(6)} kpc, east ${eastKpc[index].toPrecision(6)} kpc`;
}

/** Stops the run where a ray has come back as no number, naming the ray. */
function refuseNaN(sums: RaySums, bundle: RayBundle, index: number): void {
  const sum = sums.total[0] + sums.cosine[0] + sums.sine[0] + sums.faradayDepth;
  if (Number.isFinite(sum)) return;
  const part = Number.isFinite(sums.faradayDepth) ? 'the emission' : 'the Faraday depth';
  throw new NotANumberError(`${part} of the ray at ${placeOf(bundle, index)} is not a number`);
}

/** A formula of the scene gave something that is no finite number along a ray. */
export class NotANumberError extends Error {
  override name = 'NotANumberError';
}
