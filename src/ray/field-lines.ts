import { compileJavaScript } from '../formula/javascript.ts';
import { Graph } from '../formula/graph.ts';
import { lowerGraph } from '../formula/lower.ts';
import { coordinateSubstitution } from '../formula/vector-calculus.ts';
import { randomStream } from '../math/random.ts';
import type { Scene } from '../scene/types.ts';
import { gridInputs } from './integrand.ts';
import { parameterValues, SceneGraph } from './scene-graph.ts';

/** A line of the magnetic field through a galaxy's volume, galaxy frame. */
export interface FieldLine {
  /** x, y, z of its points in turn, kpc, in the direction of the field. */
  readonly pointsKpc: Float64Array;
  /** |B| at the points, uG. */
  readonly strengthUG: Float64Array;
  /** B at the points, x, y, z in turn, uG. */
  readonly field: Float64Array;
}

export interface FieldLineOptions {
  /** Lines wanted; fewer where the field vanishes at seeds. */
  readonly count: number;
  /** Longest path each way from the seed, kpc; default three radii of the volume. */
  readonly longestKpc?: number;
  /** Error of a step over its length; default 1e-4. */
  readonly tolerance?: number;
}

type Field = (x: number, y: number, z: number, into: Float64Array) => void;

/** Most points of one line. */
const mostPoints = 1500;

/**
 * Field lines from seeds spread evenly over the disc and its halo (a seeded low-discrepancy set, the
 * same for the same scene), followed both ways with the Dormand–Prince pair of orders 5 and 4
 * (Dormand & Prince 1980) until they leave the volume, close or fade.
 */
export function traceFieldLines(scene: Scene, { count, longestKpc, tolerance = 1e-4 }: FieldLineOptions): readonly FieldLine[] {
  const field = compileField(scene);
  const { radiusKpc, heightKpc } = scene.galaxy.volume;
  const longest = longestKpc ?? 3 * radiusKpc;
  const b = new Float64Array(3);
  const lines: FieldLine[] = [];
  for (const seed of seeds(scene, count)) {
    field(seed[0], seed[1], seed[2], b);
    if (!(Math.hypot(b[0], b[1], b[2]) > 0)) continue;
    const inside = (x: number, y: number, z: number): boolean => Math.hypot(x, y) <= radiusKpc && Math.abs(z) <= heightKpc;
    const back = follow(field, seed, -1, longest, tolerance, inside, radiusKpc);
    const ahead = follow(field, seed, 1, longest, tolerance, inside, radiusKpc);
    const points = Float64Array.from([...reversedPoints(back), ...ahead.slice(3)]);
    if (points.length < 9) continue;
    lines.push(withField(field, points));
  }
  return lines;
}

/** Seeds (kpc): radii evenly over the disc's area, azimuths by the golden angle, heights near the plane and in the halo by turns. */
function seeds(scene: Scene, count: number): readonly (readonly [number, number, number])[] {
  const { radiusKpc, heightKpc } = scene.galaxy.volume;
  const goldenAngle = Math.PI * (3 - Math.sqrt(5));
  const turn = 2 * Math.PI * randomStream(scene.numerics.seed, 'field lines').uniform();
  const levels = [0.02, -0.25, 0.25, -0.02, 0.5, -0.5];
  return Array.from({ length: count }, (_, k) => {
    const r = 0.85 * radiusKpc * Math.sqrt((k + 0.5) / count);
    const azimuth = turn + k * goldenAngle;
    return [r * Math.cos(azimuth), r * Math.sin(azimuth), heightKpc * levels[k % levels.length]] as const;
  });
}

function compileField(scene: Scene): Field {
  const graph = new Graph();
  const program = lowerGraph(graph, [...new SceneGraph(graph, scene).totalField()], ['x', 'y', 'z'], coordinateSubstitution(graph));
  const kernel = compileJavaScript(program);
  const values = parameterValues(scene, []);
  const parameters = Float64Array.from(program.parameters, (name) => values.get(name) ?? NaN);
  const { grids } = gridInputs(program, scene);
  const lanes = [0, 1, 2].map(() => new Float64Array(1));
  const out = [0, 1, 2].map(() => new Float64Array(1));
  return (x, y, z, into) => {
    [lanes[0][0], lanes[1][0], lanes[2][0]] = [x, y, z];
    kernel.evaluate(1, parameters, lanes, out, [], grids);
    for (let k = 0; k < 3; k++) into[k] = out[k][0];
  };
}

/** Dormand & Prince 1980, RK5(4)7M. */
const stages = [
  [1 / 5],
  [3 / 40, 9 / 40],
  [44 / 45, -56 / 15, 32 / 9],
  [19372 / 6561, -25360 / 2187, 64448 / 6561, -212 / 729],
  [9017 / 3168, -355 / 33, 46732 / 5247, 49 / 176, -5103 / 18656],
  [35 / 384, 0, 500 / 1113, 125 / 192, -2187 / 6784, 11 / 84],
] as const;
const fifthOrder = [...stages[5], 0];
const fourthOrder = [5179 / 57600, 0, 7571 / 16695, 393 / 640, -92097 / 339200, 187 / 2100, 1 / 40] as const;

/** Points (x, y, z in turn) from a seed along ±B/|B|. */
function follow(
  field: Field,
  seed: readonly [number, number, number],
  sense: 1 | -1,
  longest: number,
  tolerance: number,
  inside: (x: number, y: number, z: number) => boolean,
  radius: number,
): number[] {
  const points = [...seed];
  const slopes = Array.from({ length: 7 }, () => new Float64Array(3));
  const b = new Float64Array(3);
  const direction = (x: number, y: number, z: number, into: Float64Array): boolean => {
    field(x, y, z, b);
    const size = Math.hypot(b[0], b[1], b[2]);
    if (!(size > 1e-12) || !Number.isFinite(size)) return false;
    for (let k = 0; k < 3; k++) into[k] = (sense * b[k]) / size;
    return true;
  };
  const largestStep = radius / 20;
  let [x, y, z] = seed;
  let [step, path] = [radius / 100, 0];
  if (!direction(x, y, z, slopes[0])) return points;
  while (path < longest && points.length < 3 * mostPoints) {
    let alive = true;
    const at = [0, 0, 0];
    for (let stage = 0; stage < 6 && alive; stage++) {
      for (let k = 0; k < 3; k++) {
        at[k] = [x, y, z][k];
        for (let j = 0; j <= stage; j++) at[k] += step * stages[stage][j] * slopes[j][k];
      }
      alive = direction(at[0], at[1], at[2], slopes[stage + 1]);
    }
    if (!alive) break;
    let error = 0;
    for (let k = 0; k < 3; k++) {
      let difference = 0;
      for (let j = 0; j < 7; j++) difference += (fifthOrder[j] - fourthOrder[j]) * slopes[j][k];
      error = Math.max(error, Math.abs(step * difference));
    }
    const ratio = error / (tolerance * radius * (step / largestStep));
    if (ratio > 1 && step > 1e-6 * radius) {
      step *= Math.max(0.2, 0.9 * ratio ** -0.25);
      continue;
    }
    [x, y, z] = at;
    path += step;
    points.push(x, y, z);
    if (!inside(x, y, z)) break;
    if (path > 4 * largestStep && Math.hypot(x - seed[0], y - seed[1], z - seed[2]) < 0.5 * step) break;
    slopes[0].set(slopes[6]);
    step = Math.min(largestStep, step * Math.min(4, 0.9 * Math.max(ratio, 1e-6) ** -0.2));
  }
  return points;
}

function reversedPoints(points: readonly number[]): number[] {
  const turned: number[] = [];
  for (let k = points.length - 3; k >= 0; k -= 3) turned.push(points[k], points[k + 1], points[k + 2]);
  return turned;
}

function withField(field: Field, pointsKpc: Float64Array): FieldLine {
  const count = pointsKpc.length / 3;
  const values = new Float64Array(pointsKpc.length);
  const strengthUG = new Float64Array(count);
  const b = new Float64Array(3);
  for (let k = 0; k < count; k++) {
    field(pointsKpc[3 * k], pointsKpc[3 * k + 1], pointsKpc[3 * k + 2], b);
    values.set(b, 3 * k);
    strengthUG[k] = Math.hypot(b[0], b[1], b[2]);
  }
  return { pointsKpc, strengthUG, field: values };
}
