import type { Direction } from '../formula/differentiate.ts';
import type { Graph, NodeId } from '../formula/graph.ts';
import { coordinatesOf } from '../formula/vector-calculus.ts';
import { sixthOrderSlope } from '../math/slope.ts';
import { findSplit } from '../scene/resolved-turbulence.ts';
import { sections } from '../scene/section.ts';
import { scenePath } from '../scene/paths.ts';
import { shapeEntries } from '../scene/shape.ts';
import type { CosmicRayLayer, Scene } from '../scene/types.ts';
import { equipartitionElectrons } from './equipartition.ts';
import { rayMotions, type Arithmetic } from './ray-motion.ts';
import { placedComponents, type PlacedComponent } from './scene-graph.ts';

/** A number of a scene by which maps can be differentiated, and how it enters the integrand. */
export interface TangentParameter {
  /** Path in the scene, such as `field.halo.strength`. */
  readonly path: string;
  /** Run-time parameters of the integrand that are this number itself. */
  readonly leaves: readonly string[];
  /** The layer whose heights by emission group follow this number. */
  readonly layer?: PlacedComponent;
}

/** Run-time parameter that holds 1/distance, kpc^-1. */
export const perDistanceName = 'rate/perDistance';

/** Numbers that enter without a run-time parameter of their own. */
const geometric: readonly string[] = [...Object.keys(rayMotions), 'galaxy.volume.radius', 'galaxy.volume.height', 'cosmicRays.index'];
const turbulent: Readonly<Record<string, string>> = {
  'turbulence.unresolved.rms': 'turbulence/rms',
  'turbulence.unresolved.cell': 'turbulence/cell',
  'turbulence.ordered.rms': 'ordered/rms',
  'turbulence.ordered.cell': 'ordered/cell',
  'turbulence.ordered.pitch': 'ordered/pitch',
};
/** Step of the index p, as a share of p - 2, of the differences that the factor of equipartition is differentiated by: they leave 1e-12. */
const indexStep = 0.006;
const equipartitionRate = 'rate/equipartition';

/**
 * The parameter at a path of a scene, or undefined where rays do not depend on it or not smoothly
 * (whole numbers), where thermal gas absorbs, where turbulence is drawn, or where electrons are scaled to a flux density that
 * every number changes. Throws InputError for an unknown path.
 */
export function findTangentParameter(scene: Scene, path: string): TangentParameter | undefined {
  if (scenePath(scene, path).whole || scene.freeFree || scene.cosmicRays.scaleTo || findSplit(scene)) return undefined;
  // The index also sets the steps of the ordered field's moments.
  if (path === 'cosmicRays.index' && scene.turbulence.ordered) return undefined;
  if (geometric.includes(path)) return { path, leaves: [] };
  if (path in turbulent) return { path, leaves: [turbulent[path]] };
  const placed = placedComponents(scene);
  for (const [key, section] of Object.entries(sections) as [keyof typeof sections, (typeof sections)[keyof typeof sections]][]) {
    for (const component of placed[key]) {
      const start = `${section.title}.${component.component.name}.`;
      if (!path.startsWith(start)) continue;
      const given = path.slice(start.length);
      const rename: Readonly<Record<string, string>> = section.rename;
      const name = Object.keys(component.component.parameters).find((own) => (rename[own] ?? own) === given) ?? (isShapeLeaf(component, given) ? given : undefined);
      const followsHeight = 'heightIndex' in component.component && component.component.heightIndex !== undefined;
      const law = followsHeight && ['height', 'heightIndex', 'heightAt'].includes(given) ? { layer: component } : {};
      if (name === undefined && !('layer' in law)) continue;
      return { path, leaves: name === undefined ? [] : [`${component.path}/${name}`], ...law };
    }
  }
  return undefined;
}

/** Whether a key is a number of a component's modulation that is a run-time parameter itself: the arms' width is not. */
function isShapeLeaf({ component }: PlacedComponent, key: string): boolean {
  return key !== 'arms.width' && shapeEntries.some((entry) => entry.key === key && entry.read(component) !== undefined);
}

/** Names of the run-time rates of a layer's heights with a number of its height law. */
const rateName = ({ path }: TangentParameter, group: number): string => `rate/${path}@${group}`;

/** The direction in which an integrand's leaves move when a number of the scene does. */
export function directionOf(graph: Graph, parameter: TangentParameter, groups: number): Direction {
  const { path, leaves: names, layer } = parameter;
  const leaves = new Map<NodeId, NodeId>(names.map((name) => [graph.parameter(name), graph.constant(1)]));
  if (layer) {
    for (let group = 0; group < groups; group++) {
      leaves.set(graph.parameter(`${layer.path}/height@${group}`), graph.parameter(rateName(parameter, group)));
    }
  }
  if (path === 'cosmicRays.index') {
    leaves.set(graph.parameter('halfPower'), graph.constant(1 / 4));
    leaves.set(graph.parameter('cosmicRays/equipartition'), graph.parameter(equipartitionRate));
    const rate = graph.constant(1);
    return { leaves, tables: new Map(['riceTotal', 'riceAligned'].map((table) => [table, { table: `${table}ByIndex`, rate }])) };
  }
  if (path in rayMotions) moveRay(graph, path, leaves);
  return { leaves };
}

function moveRay(graph: Graph, path: string, leaves: Map<NodeId, NodeId>): void {
  const { x, y, z, r, phi } = coordinatesOf(graph);
  const [sinI, cosI] = [graph.parameter('sinI'), graph.parameter('cosI')];
  const onNodes: Arithmetic<NodeId> = {
    add: (a, b) => graph.add(a, b), multiply: (a, b) => graph.multiply(a, b), negate: (a) => graph.negate(a), zero: graph.constant(0),
  };
  const [dx, dy, dz] = rayMotions[path](onNodes, { x, y, z, sinI, cosI, perDistance: graph.parameter(perDistanceName) });
  leaves.set(x, dx).set(y, dy).set(z, dz);
  leaves.set(r, graph.divide(graph.add(graph.multiply(x, dx), graph.multiply(y, dy)), r));
  leaves.set(phi, graph.multiply(graph.subtract(graph.multiply(x, dy), graph.multiply(y, dx)), graph.power(r, -2)));
  if (path === 'galaxy.inclination') leaves.set(sinI, cosI).set(cosI, graph.negate(sinI));
}

/** Values of the run-time rates of some parameters for a scene. */
export function rateValues(scene: Scene, parameters: readonly TangentParameter[], groupFrequenciesHz: readonly number[]): ReadonlyMap<string, number> {
  const rates = new Map([[perDistanceName, 1 / scene.galaxy.distanceKpc]]);
  const { equipartition, index } = scene.cosmicRays;
  if (equipartition) {
    const electrons = (p: number): number => equipartitionElectrons(p, equipartition.protonRatio);
    rates.set(equipartitionRate, electrons(index) * sixthOrderSlope((p) => Math.log(electrons(p)), index, indexStep * (index - 2)));
  }
  for (const parameter of parameters) {
    const { layer, path } = parameter;
    const current = layer && placedComponents(scene).cosmicRays.find((placed) => placed.path === layer.path);
    if (!current) continue;
    const { heightIndex = 0, heightAtHz = 1, parameters: { height } } = current.component as CosmicRayLayer;
    groupFrequenciesHz.forEach((frequency, group) => {
      const share = Math.pow(frequency / heightAtHz, -heightIndex);
      const byKey: Readonly<Record<string, number>> = {
        height: share, heightIndex: -height * share * Math.log(frequency / heightAtHz), heightAt: (height * share * heightIndex) / heightAtHz,
      };
      rates.set(rateName(parameter, group), byKey[path.slice(path.lastIndexOf('.') + 1)]);
    });
  }
  return rates;
}
