import { brightnessPerKpc, intrinsicPolarization } from '../../ray/synchrotron.ts';
import type { RayResult } from '../../ray/types.ts';
import type { Scene } from '../../scene/types.ts';
import { followMidpoint, type MidpointMap } from './midpoint.ts';
import { channels, follow, prepare, sceneAt, squareBundle, tolerance } from './prepare.ts';
import { compileC, findNumpy, runReference } from './references.ts';
import { cell, percentile, quickest } from './timing.ts';

const side = 129;
/** numpy is slow: fewer pixels tell as much. */
const numpySide = 65;

/** Errors of Q and U over the scale that `tolerance` is relative to, sorted. */
export function polarizedErrors(result: Pick<RayResult, 'Q' | 'U'>, exact: MidpointMap): Float64Array {
  const pixels = exact.I.length;
  let [largestI, largestP] = [0, 0];
  for (let k = 0; k < pixels; k++) {
    largestI = Math.max(largestI, exact.I[k]);
    largestP = Math.max(largestP, Math.hypot(exact.Q[k], exact.U[k]));
  }
  const scale = Math.max(largestP, 1e-3 * largestI);
  return Float64Array.from({ length: pixels }, (_, k) => Math.hypot(result.Q[k] - exact.Q[k], result.U[k] - exact.U[k]) / scale).sort();
}

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

/** Steps at which 99 % of pixels are within tolerance by the midpoint rule, found on a small map in growing steps. */
export function stepsForTolerance(scene: Scene, frequencyHz: number): number {
  const small = squareBundle(33);
  const fine = prepare({ ...scene, numerics: { ...scene.numerics, tolerance: 1e-9 } }, [frequencyHz], small, 'wasm');
  const exact = plain(follow(fine), scene, frequencyHz);
  for (let steps = 50; steps < 20_000; steps = Math.ceil(steps * 1.15)) {
    if (percentile(polarizedErrors(followMidpoint(scene, small, frequencyHz, steps), exact), 0.99) < tolerance) return steps;
  }
  throw new Error('the midpoint rule does not reach the tolerance');
}

/** μs of CPU per pixel beside plain references that reach the same accuracy. */
export function compareAtEqualAccuracy(folder: string): void {
  const pixels = side * side;
  const scene = sceneAt(40);
  const bundle = squareBundle(side);
  const steps = stepsForTolerance(scene, 1.4e9);
  const [c, numpy] = [compileC(folder), findNumpy(folder)];
  console.log(`\nμs of CPU per pixel, ${side}² pixels, inclination 40°, ${tolerance} for 99 % of pixels (midpoint rule: ${steps} steps)`);
  console.log('channels      wasm  js adapt.   js fixed    C fixed      numpy  ns/sample  |  js adapt.   js fixed    C fixed      numpy : wasm');
  for (const count of [1, 3, 16, 128]) {
    const spectrum = channels(count);
    const wasm = prepare(scene, spectrum, bundle, 'wasm');
    follow(wasm);
    const fast = quickest(count > 16 ? 3 : 8, () => follow(wasm));
    const perPixel = (seconds: number | undefined, all = pixels): number | undefined => (seconds === undefined ? undefined : (1e6 * seconds) / all);
    const own = (1e6 * fast.seconds) / pixels;
    const others = [
      count > 16 ? undefined : perPixel(quickest(1, () => follow(prepare(scene, spectrum, bundle, 'javascript'))).seconds),
      count > 1 ? undefined : perPixel(quickest(1, () => followMidpoint(scene, bundle, spectrum[0], steps)).seconds),
      c ? perPixel(runReference(c, folder, scene, side, steps, spectrum, count > 16 ? 1 : 5).seconds) : undefined,
      numpy && count === 3 ? perPixel(runReference(numpy, folder, scene, numpySide, steps, spectrum, 1).seconds, numpySide * numpySide) : undefined,
    ];
    const ratios = others.map((other) => cell(other === undefined ? undefined : other / own));
    console.log(`${String(count).padStart(8)}${[own, ...others].map(cell).join(' ')} ${cell((1e9 * fast.seconds) / fast.value.samples)}  | ${ratios.join(' ')}`);
  }
  if (!c) console.log('no C compiler (cc) found: install one, e.g. apt-get install gcc, to compare with C');
  if (!numpy) console.log('no /usr/bin/python3 with numpy found: apt-get install python3-numpy to compare with it');
}
