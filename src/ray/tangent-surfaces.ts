import { differentiateAlong } from '../formula/differentiate.ts';
import { Graph } from '../formula/graph.ts';
import { interpretProgram } from '../formula/javascript.ts';
import { lowerGraph } from '../formula/lower.ts';
import type { Scene } from '../scene/types.ts';
import { onNumbers, rayMotions } from './ray-motion.ts';
import { exactSineCosine, parameterValues, SceneGraph } from './scene-graph.ts';
import { directionOf, findTangentParameter, type TangentParameter } from './tangent-parameters.ts';

/** A height or radius (kpc) where the integrand may jump, and how fast it moves with each parameter. */
export interface Surface {
  readonly kind: 'height' | 'radius';
  /** Whether it bounds the volume, outside of which there is nothing. */
  readonly bounds: boolean;
  readonly valueKpc: number;
  readonly rates: Float64Array;
}

/** One crossing of a ray with a surface that moves. */
export interface Crossing {
  /** kpc along the ray, growing towards the observer. */
  readonly s: number;
  /** Whether there is anything in front of the surface, and behind it. */
  readonly before: boolean;
  readonly behind: boolean;
  /** ds of the crossing by each parameter. */
  readonly rates: Float64Array;
}

/** Surfaces of a scene that move along rays with any of the parameters. */
export interface Surfaces {
  /** Most crossings of one ray. */
  readonly most: number;
  /** Crossings of the ray at (major, minor), kpc, the nearest to the observer first. */
  crossings(majorKpc: number, minorKpc: number): readonly Crossing[];
  /** Whether surfaces coincide that move differently with a parameter: its derivative has two sides, neither known. */
  readonly splits: readonly boolean[];
}

/** Surfaces closer than this share of their size are one. */
const coincidence = 1e-9;

/** Prepares the surfaces of scenes of one structure: declared edges and the ends of the volume. */
export function compileSurfaces(scene: Scene, parameters: readonly TangentParameter[]): (scene: Scene) => Surfaces {
  const graph = new Graph();
  const edges = new SceneGraph(graph, scene, new Set(parameters.flatMap(({ leaves }) => leaves))).edges();
  const nodes = [...edges.z, ...edges.r];
  const slopes = parameters.map((parameter) => {
    const direction = directionOf(graph, parameter, 0);
    return nodes.map((node) => differentiateAlong(graph, node, direction));
  });
  const program = lowerGraph(graph, [...nodes, ...slopes.flat()], []);
  return (given) => {
    const values = parameterValues(given, []);
    const numbers = interpretProgram(program, Float64Array.from(program.parameters, (name) => values.get(name) ?? NaN), []);
    const rates = (index: number): Float64Array => Float64Array.from(parameters, (_, p) => numbers[(p + 1) * nodes.length + index]);
    const { radiusKpc, heightKpc } = given.galaxy.volume;
    const byPath = (path: string, sign: number): Float64Array => Float64Array.from(parameters, (parameter) => (parameter.path === path ? sign : 0));
    const ends: Surface[] = [
      { kind: 'height', bounds: true, valueKpc: heightKpc, rates: byPath('galaxy.volume.height', 1) },
      { kind: 'height', bounds: true, valueKpc: -heightKpc, rates: byPath('galaxy.volume.height', -1) },
      { kind: 'radius', bounds: true, valueKpc: radiusKpc, rates: byPath('galaxy.volume.radius', 1) },
    ];
    const declared = nodes.map((_, index): Surface => ({
      kind: index < edges.z.length ? 'height' : 'radius', bounds: false, valueKpc: numbers[index], rates: rates(index),
    }));
    return surfacesOf(given, parameters, [...ends, ...declared]);
  };
}

/**
 * Those of some paths by which a scene has no derivative as it stands: surfaces coincide that part
 * when the number changes, so that the change to either side is another one.
 */
export function splitPaths(scene: Scene, paths: readonly string[]): readonly string[] {
  const parameters = paths.flatMap((path) => findTangentParameter(scene, path) ?? []);
  const { splits } = compileSurfaces(scene, parameters)(scene);
  return parameters.filter((_, p) => splits[p]).map(({ path }) => path);
}

function surfacesOf(scene: Scene, parameters: readonly TangentParameter[], all: readonly Surface[]): Surfaces {
  const distinct = all.filter((one, k) => !all.slice(0, k).some((other) => coincide(one, other)));
  const splits = parameters.map((_, p) => all.some((one, k) => all.slice(0, k).some((other) => coincide(one, other) && one.rates[p] !== other.rates[p])));
  const [sinI, cosI] = exactSineCosine(scene.galaxy.inclination);
  const motions = parameters.map(({ path }) => rayMotions[path] as (typeof rayMotions)[string] | undefined);
  const moving = distinct.filter(({ rates }) => motions.some((motion) => motion !== undefined) || rates.some((rate) => rate !== 0));
  const { radiusKpc, heightKpc } = scene.galaxy.volume;
  const perDistance = 1 / scene.galaxy.distanceKpc;
  return {
    most: moving.reduce((sum, { kind }) => sum + (kind === 'height' ? 1 : 2), 0),
    splits,
    crossings: (major, minor) => {
      const found: Crossing[] = [];
      const note = (surface: Surface, s: number): void => {
        const [x, y, z] = [major, minor * cosI - s * sinI, minor * sinI + s * cosI];
        const isHeight = surface.kind === 'height';
        // Within the volume in the other direction, or the ray does not meet the surface there.
        if (isHeight ? Math.hypot(x, y) >= radiusKpc : Math.abs(z) >= heightKpc) return;
        if (!surface.bounds && (isHeight ? Math.abs(z) >= heightKpc : Math.hypot(x, y) >= radiusKpc)) return;
        const along = isHeight ? cosI : (-sinI * y) / surface.valueKpc;
        const rates = surface.rates.map((rate, p) => {
          const [dx, dy, dz] = motions[p]?.(onNumbers, { x, y, z, sinI, cosI, perDistance }) ?? [0, 0, 0];
          return (rate - (isHeight ? dz : (x * dx + y * dy) / surface.valueKpc)) / along;
        });
        const outwards = along * (isHeight ? Math.sign(z) : 1) > 0;
        found.push({ s, before: !(surface.bounds && outwards), behind: !(surface.bounds && !outwards), rates });
      };
      for (const surface of moving) {
        if (surface.kind === 'height') {
          if (cosI !== 0) note(surface, (surface.valueKpc - minor * sinI) / cosI);
          continue;
        }
        const square = surface.valueKpc ** 2 - major ** 2;
        if (square <= 0 || sinI === 0) continue;
        for (const y of [Math.sqrt(square), -Math.sqrt(square)]) note(surface, (minor * cosI - y) / sinI);
      }
      return found.sort((a, b) => b.s - a.s);
    },
  };
}

function coincide(one: Surface, other: Surface): boolean {
  return one.kind === other.kind && Math.abs(one.valueKpc - other.valueKpc) <= coincidence * Math.max(Math.abs(one.valueKpc), Math.abs(other.valueKpc));
}
