import { buildFormula } from '../formula/build.ts';
import type { Graph, NodeId } from '../formula/graph.ts';
import { coordinatesOf, curlCartesian, type Vector } from '../formula/vector-calculus.ts';
import { findSplit } from '../scene/resolved-turbulence.ts';
import type { Scene } from '../scene/types.ts';

/** Names of the grids of resolved turbulence: components of the potential, and the logarithm of n_e. */
export const turbulenceGridNames = { potential: ['turbulence/ax', 'turbulence/ay', 'turbulence/az'], electrons: 'turbulence/electrons' } as const;

/** Where a periodic grid over the box, whose middle is the galaxy's centre, is read. */
function gridPlaces(graph: Graph, cells: number): readonly NodeId[] {
  const { x, y, z } = coordinatesOf(graph);
  const perKpc = graph.parameter('resolved/cellsPerKpc');
  return [x, y, z].map((coordinate) => graph.add(graph.multiply(coordinate, perKpc), graph.constant(cells / 2)));
}

/** A random field, uG: the curl of the potential times `profile`, so that it stays free of divergence. */
export function resolvedField(graph: Graph, cells: number, profile: NodeId): Vector {
  const places = gridPlaces(graph, cells);
  const strength = graph.parameter('resolved/strength');
  const [ax, ay, az] = turbulenceGridNames.potential.map((name) => graph.multiply(strength, profile, graph.grid(name, [0, 0, 0], places)));
  return curlCartesian(graph, coordinatesOf(graph), [ax, ay, az]);
}

/** Log-normal factor to n_e of mean 1: exp(s g - s²/2). */
export function electronFactor(graph: Graph, cells: number): NodeId {
  const spread = graph.parameter('resolved/spread');
  const g = graph.grid(turbulenceGridNames.electrons, [0, 0, 0], gridPlaces(graph, cells));
  return graph.unary('exp', graph.subtract(graph.multiply(spread, g), graph.multiply(graph.constant(0.5), graph.power(spread, 2))));
}

/** A formula of x, y, z, r and phi, kpc and radians. */
export function formulaProfile(graph: Graph, text: string): NodeId {
  return buildFormula(graph, text, new Map(Object.entries(coordinatesOf(graph))));
}

/** Run-time values of resolved turbulence by name; none where there is none. */
export function turbulenceValues(scene: Scene): ReadonlyMap<string, number> {
  const { resolved } = scene.turbulence;
  const split = findSplit(scene);
  if (!resolved || !split) return new Map();
  const { boxKpc, cells, electrons } = resolved;
  return new Map([
    ['resolved/cellsPerKpc', cells / boxKpc],
    ['resolved/strength', split.resolvedUG * boxKpc],
    ['resolved/spread', electrons ? Math.sqrt(Math.log1p(electrons.rms ** 2)) : 0],
    ['resolved/rest', split.restUG],
    ['resolved/restCell', split.restCellKpc],
  ]);
}
