import { findTangentParameter } from '../ray/tangent-parameters.ts';
import { splitPaths } from '../ray/tangent-surfaces.ts';
import { sceneNumbers } from '../scene/paths.ts';
import type { Scene } from '../scene/types.ts';
import { InputError } from '../units/input-error.ts';
import type { SceneOf } from './scene-of.ts';

/** A scene and how its numbers change with each free parameter. */
export interface SceneSlopes {
  readonly scene: Scene;
  /** Paths of the numbers by which rays are to be differentiated. */
  readonly paths: readonly string[];
  /** Per free parameter; undefined where rays have no derivative by one of the numbers that follow it. */
  readonly columns: readonly (SceneSlope | undefined)[];
}

/** How a scene changes with one free parameter. */
export interface SceneSlope {
  /** d(number)/d(parameter) for each of `paths`. */
  readonly rates: Float64Array;
  /** Scenes a small step ahead and behind, and the parameter's difference between them. */
  readonly ahead: Scene;
  readonly behind: Scene;
  readonly width: number;
  /** Whether the foreground changes. */
  readonly turnsForeground: boolean;
}

/** Step over the size of a value: numbers follow by smooth formulas of 16 digits, so that 1e-10 remains of either error. */
const relativeStep = 1e-5;

/**
 * How a scene's numbers follow from `count` free parameters, ties included (chain rule): central
 * differences of the numbers alone, no rays. One-sided where a step ahead or behind is not allowed.
 */
export function sceneSlopes(sceneOf: SceneOf, values: Float64Array, count: number): SceneSlopes {
  const scene = sceneOf(values);
  const steps = Array.from({ length: count }, (_, j) => stepOf(sceneOf, scene, values, j));
  const rates = steps.map((step) => step && ratesOf(step));
  const touched = [...new Set(rates.flatMap((numbers) => [...(numbers?.keys() ?? [])]))];
  const known = touched.filter((path) => findTangentParameter(scene, path) !== undefined);
  const split = splitPaths(scene, known);
  const smooth = new Set(known.filter((path) => !split.includes(path)));
  const isExact = (path: string): boolean => smooth.has(path) || isForeground(path);
  const paths = [...smooth].filter((path) => rates.some((numbers) => numbers?.has(path) && [...numbers.keys()].every(isExact))).sort();
  const columns = steps.map((step, j): SceneSlope | undefined => {
    const numbers = rates[j];
    if (!step || !numbers || ![...numbers.keys()].every(isExact)) return undefined;
    const turnsForeground = [...numbers.keys()].some((path) => isForeground(path) || path === 'galaxy.distance');
    return { ...step, rates: Float64Array.from(paths, (path) => numbers.get(path) ?? 0), turnsForeground };
  });
  return { scene, paths, columns };
}

function isForeground(path: string): boolean {
  return path.startsWith('observation.foreground');
}

type Step = Pick<SceneSlope, 'ahead' | 'behind' | 'width'>;

function stepOf(sceneOf: SceneOf, scene: Scene, values: Float64Array, j: number): Step | undefined {
  const step = relativeStep * (Math.abs(values[j]) || 1);
  const at = (shift: number): { readonly value: number; readonly scene: Scene } | undefined => {
    const moved = Float64Array.from(values);
    moved[j] += shift;
    try {
      return { value: moved[j], scene: sceneOf(moved) };
    } catch (problem) {
      if (problem instanceof InputError) return undefined;
      throw problem;
    }
  };
  const here = { value: values[j], scene };
  const [up, down] = [at(step) ?? here, at(-step) ?? here];
  return up === down ? undefined : { ahead: up.scene, behind: down.scene, width: up.value - down.value };
}

/** Numbers of the scene that change, and how fast. */
function ratesOf({ ahead, behind, width }: Step): ReadonlyMap<string, number> {
  const before = sceneNumbers(behind);
  return new Map([...sceneNumbers(ahead)].flatMap(([path, value]) => (value === before.get(path) ? [] : [[path, (value - (before.get(path) ?? NaN)) / width] as const])));
}
