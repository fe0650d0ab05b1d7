import { execFileSync } from 'node:child_process';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { findMapScale, makeRayEngine, traceRays, type BackEnd, type MapScale, type RayEngine } from '../ray/trace.ts';
import { exactSineCosine } from '../ray/scene-graph.ts';
import { brightnessPerKpc, intrinsicPolarization, wavelengthSquared } from '../ray/synchrotron.ts';
import type { RayBundle, RayResult } from '../ray/types.ts';
import { parseScene } from '../scene/parse-scene.ts';
import type { Scene } from '../scene/types.ts';
import { followMidpoint, type MidpointMap } from './midpoint.ts';
import fixedStepSource from './fixed-step.c?raw';
import sceneText from '../../test/reference/a-spiral-quadrupole.yaml?raw';

// Compares the speed of following rays with plain references, all in one run: ratios travel
// between machines, times do not. Run by `npm run bench`.

const tolerance = 1e-4;
const side = 129;
const pixelKpc = 30 / side;

interface Timed<T> {
  readonly value: T;
  /** CPU of this thread and its helpers, μs per pixel. */
  readonly microseconds: number;
}

/** The quickest of several runs: what else the machine does only ever adds. */
function time<T>(runs: number, pixels: number, run: () => T): Timed<T> {
  let best = Infinity;
  let value = run();
  for (let k = 0; k < runs; k++) {
    const start = process.cpuUsage();
    value = run();
    const { user, system } = process.cpuUsage(start);
    best = Math.min(best, user + system);
  }
  return { value, microseconds: best / pixels };
}

function bundleOf(rows: number, stepKpc: number): RayBundle {
  const offset = (k: number): number => (k - (rows - 1) / 2) * stepKpc;
  return {
    northKpc: Float64Array.from({ length: rows * rows }, (_, k) => offset(Math.floor(k / rows))),
    eastKpc: Float64Array.from({ length: rows * rows }, (_, k) => -offset(k % rows)),
  };
}

function sceneAt(inclinationDeg: number, wanted = tolerance): Scene {
  const scene = parseScene(sceneText, 'a-spiral-quadrupole.yaml');
  return { ...scene, galaxy: { ...scene.galaxy, inclination: (inclinationDeg * Math.PI) / 180 }, numerics: { ...scene.numerics, tolerance: wanted } };
}

/** So many channels; three are 1.4, 2.3 and 4.8 GHz, more fill a band from 1.3 to 1.7 GHz. */
function channels(count: number): number[] {
  if (count === 1) return [1.4e9];
  if (count === 3) return [1.4e9, 2.3e9, 4.8e9];
  return Array.from({ length: count }, (_, k) => 1.3e9 + ((k + 0.5) * 0.4e9) / count);
}

interface Prepared {
  readonly engine: RayEngine;
  readonly scene: Scene;
  readonly scale: MapScale;
  readonly bundle: RayBundle;
}

function prepare(scene: Scene, frequencyHz: readonly number[], bundle: RayBundle, backEnd: BackEnd): Prepared {
  const engine = makeRayEngine(scene, frequencyHz.map((hz) => ({ frequencyHz: hz, centreHz: hz })), backEnd);
  return { engine, scene, bundle, scale: findMapScale(engine, scene, bundle) };
}

const follow = ({ engine, scene, bundle, scale }: Prepared): RayResult => traceRays(engine, scene, bundle, scale);

/** Errors of Q and U over the scale that `tolerance` is relative to, sorted. */
function polarizedErrors(result: MidpointMap, exact: MidpointMap): Float64Array {
  const pixels = exact.I.length;
  let [largestI, largestP] = [0, 0];
  for (let k = 0; k < pixels; k++) {
    largestI = Math.max(largestI, exact.I[k]);
    largestP = Math.max(largestP, Math.hypot(exact.Q[k], exact.U[k]));
  }
  const scale = Math.max(largestP, 1e-3 * largestI);
  return Float64Array.from({ length: pixels }, (_, k) => Math.hypot(result.Q[k] - exact.Q[k], result.U[k] - exact.U[k]) / scale).sort();
}

const percentile = (sorted: Float64Array, share: number): number => sorted[Math.floor(share * (sorted.length - 1))];

/** The first channel of a result, in the units and the frame of the midpoint references. */
function plain(result: RayResult, scene: Scene, frequencyHz: number): MidpointMap {
  const pixels = result.faradayDepth.length;
  const unit = brightnessPerKpc(scene.cosmicRays.index, frequencyHz);
  const polarized = unit * intrinsicPolarization(scene.cosmicRays.index);
  const [c, s] = [Math.cos(2 * scene.galaxy.positionAngle), Math.sin(2 * scene.galaxy.positionAngle)];
  const map = { I: new Float64Array(pixels), Q: new Float64Array(pixels), U: new Float64Array(pixels) };
  for (let k = 0; k < pixels; k++) {
    map.I[k] = result.I[k] / unit;
    map.Q[k] = (c * result.Q[k] + s * result.U[k]) / polarized;
    map.U[k] = (c * result.U[k] - s * result.Q[k]) / polarized;
  }
  return map;
}

/** A C program of one scene with fixed steps, or undefined where there is no compiler. */
function compileReference(folder: string): string | undefined {
  const [source, program] = [join(folder, 'fixed-step.c'), join(folder, 'fixed-step')];
  writeFileSync(source, fixedStepSource);
  try {
    execFileSync('cc', ['-O3', '-march=native', '-fno-math-errno', '-fno-trapping-math', '-o', program, source, '-lm'], { stdio: 'pipe' });
    return program;
  } catch {
    return undefined;
  }
}

function runReference(program: string, folder: string, scene: Scene, rows: number, stepKpc: number, steps: number, frequencyHz: readonly number[]): Timed<MidpointMap> {
  const [sinI, cosI] = exactSineCosine(scene.galaxy.inclination);
  const out = join(folder, 'out.bin');
  const numbers = [rows, stepKpc, sinI, cosI, steps, out, ...frequencyHz.map(wavelengthSquared)].map(String);
  const pixels = rows * rows;
  let seconds = Infinity;
  for (let k = 0; k < 3; k++) seconds = Math.min(seconds, Number(execFileSync(program, numbers, { encoding: 'utf8' })));
  const bytes = readFileSync(out);
  const all = new Float64Array(bytes.buffer.slice(bytes.byteOffset, bytes.byteOffset + bytes.byteLength));
  const plane = (k: number): Float64Array => all.subarray(k * pixels, (k + 1) * pixels);
  return { value: { I: plane(0), Q: plane(1), U: plane(2) }, microseconds: (1e6 * seconds) / pixels };
}

/** Steps at which 99 % of pixels are within tolerance by the midpoint rule, found on a small map in growing steps. */
function stepsForTolerance(scene: Scene, frequencyHz: number): number {
  const small = bundleOf(33, (side * pixelKpc) / 33);
  const fine = prepare({ ...scene, numerics: { ...scene.numerics, tolerance: 1e-9 } }, [frequencyHz], small, 'wasm');
  const exact = plain(follow(fine), scene, frequencyHz);
  for (let steps = 50; steps < 20_000; steps = Math.ceil(steps * 1.15)) {
    if (percentile(polarizedErrors(followMidpoint(scene, small, frequencyHz, steps), exact), 0.99) < tolerance) return steps;
  }
  throw new Error('the midpoint rule does not reach the tolerance');
}

const number = (value: number): string => value.toPrecision(3).padStart(9);

function compareAtEqualAccuracy(folder: string): void {
  const pixels = side * side;
  const scene = sceneAt(40);
  const bundle = bundleOf(side, pixelKpc);
  const steps = stepsForTolerance(scene, 1.4e9);
  const program = compileReference(folder);
  console.log(`\nμs of CPU per pixel, ${side}² pixels, inclination 40°, ${tolerance} for 99 % of pixels (midpoint rule: ${steps} steps)`);
  console.log(' channels     wasm  js adapt.   js fixed    C fixed   wasm ns/sample   C fixed : wasm   js adapt. : wasm');
  for (const count of [1, 3, 16, 128]) {
    const spectrum = channels(count);
    const wasm = prepare(scene, spectrum, bundle, 'wasm');
    follow(wasm);
    const fast = time(8, pixels, () => follow(wasm));
    const oracle = count > 16 ? undefined : time(1, pixels, () => follow(prepare(scene, spectrum, bundle, 'javascript')));
    const fused = count === 1 ? time(1, pixels, () => followMidpoint(scene, bundle, spectrum[0], steps)) : undefined;
    const c = program === undefined ? undefined : runReference(program, folder, scene, side, pixelKpc, steps, spectrum);
    const cell = (timed: Timed<unknown> | undefined): string => (timed ? number(timed.microseconds) : '        –');
    const ratio = (timed: Timed<unknown> | undefined): string => (timed ? number(timed.microseconds / fast.microseconds) : '        –');
    const perSample = (1000 * fast.microseconds * pixels) / fast.value.samples;
    console.log(`${String(count).padStart(9)}${cell(fast)}  ${cell(oracle)}  ${cell(fused)}  ${cell(c)}        ${number(perSample)}        ${ratio(c)}          ${ratio(oracle)}`);
  }
  if (program === undefined) console.log('no C compiler (cc) found: install one, e.g. apt-get install gcc, to compare with C');
}

function countSamples(): void {
  console.log('\nsamples and errors, 1.4/2.3/4.8 GHz and 0.35 GHz, errors of Q and U over the tolerance of 1e-4');
  console.log(' inclination  samples/ray   median      90 %      99 %       max');
  for (const inclination of [0, 5, 40, 70, 88, 90]) {
    for (const frequencyHz of [1.4e9, 0.35e9]) {
      const bundle = bundleOf(41, 30 / 41);
      const run = prepare(sceneAt(inclination), [frequencyHz], bundle, 'wasm');
      const result = follow(run);
      const exact = follow(prepare(sceneAt(inclination, 1e-10), [frequencyHz], bundle, 'wasm'));
      const errors = polarizedErrors(result, exact).map((error) => error / tolerance);
      const hit = exact.I.filter((value) => value > 0).length;
      const shares = [0.5, 0.9, 0.99, 1].map((share) => number(percentile(errors, share)));
      console.log(`${String(inclination).padStart(6)}° ${(frequencyHz / 1e9).toFixed(2)} ${number(result.samples / hit)}   ${shares.join(' ')}`);
    }
  }
}

const folder = mkdtempSync(join(tmpdir(), 'gyrelight-bench-'));
try {
  compareAtEqualAccuracy(folder);
  countSamples();
} finally {
  rmSync(folder, { recursive: true });
}
