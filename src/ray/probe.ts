import { compileJavaScript } from '../formula/javascript.ts';
import { Graph, type NodeId } from '../formula/graph.ts';
import { lowerGraph } from '../formula/lower.ts';
import { coordinatesOf, coordinateSubstitution, jacobian, type Vector } from '../formula/vector-calculus.ts';
import { randomStream } from '../math/random.ts';
import { buildField, isSolenoidalByConstruction } from '../model/build-model.ts';
import type { Component, Scene } from '../scene/types.ts';
import { gridInputs, sceneValues } from './integrand.ts';
import { placedComponents, SceneGraph } from './scene-graph.ts';

/** Points in the galaxy frame, kpc. */
export interface Points {
  readonly x: Float64Array;
  readonly y: Float64Array;
  readonly z: Float64Array;
}

/** Fields and densities of a scene at points. */
export interface Probe extends Points {
  /** uG, galaxy frame. */
  readonly Bx: Float64Array;
  readonly By: Float64Array;
  readonly Bz: Float64Array;
  /** Thermal electrons, cm^-3. */
  readonly ne: Float64Array;
  /** Cosmic-ray electrons, cm^-3; layers that depend on frequency at their reference. */
  readonly C: Float64Array;
  /** ∇·B, uG/kpc. */
  readonly divB: Float64Array;
  /** D = |∇·B|/‖∇B‖ (Frobenius norm), 0 where ‖∇B‖ is below 1e-12 |B|/kpc. */
  readonly relativeDivergence: Float64Array;
}

/** ‖∇B‖ below this part of |B| per kpc counts as uniform. */
const uniformBelow = 1e-12;

/** Evaluates a scene's field, densities and divergence at points, by exact derivatives. */
export function probeScene(scene: Scene, points: Points): Probe {
  const graph = new Graph();
  const parts = new SceneGraph(graph, scene);
  const field = parts.totalField();
  const nodes = [...field, parts.electronDensity(), parts.cosmicRaysAtReference(), ...divergenceNodes(graph, field)];
  const columns = evaluateNodes(graph, nodes, scene, points);
  const [Bx, By, Bz, ne, C, divB, norm] = columns;
  const relativeDivergence = divB.map((value, k) => relative(value, norm[k], Math.hypot(Bx[k], By[k], Bz[k])));
  return { ...points, Bx, By, Bz, ne, C, divB, relativeDivergence };
}

/** How far a field component is from divergence-free. */
export interface Divergence {
  readonly name: string;
  /** True where potentials make ∇·B zero; false where the user gave B and it was measured. */
  readonly byConstruction: boolean;
  /** Largest D = |∇·B|/‖∇B‖ over random points of the volume. */
  readonly largest: number;
  readonly at: readonly [number, number, number];
}

const divergencePoints = 2000;

/** Measures D of every field component, resolved turbulence last, at seeded random points of the scene's volume. */
export function measureDivergence(scene: Scene): readonly Divergence[] {
  const points = randomPoints(scene, divergencePoints);
  const largestOf = (name: string, byConstruction: boolean, build: (parts: SceneGraph, graph: Graph) => Vector): Divergence => {
    const graph = new Graph();
    const field = build(new SceneGraph(graph, scene), graph);
    const [bx, by, bz, divB, norm] = evaluateNodes(graph, [...field, ...divergenceNodes(graph, field)], scene, points);
    let [largest, where] = [0, 0];
    for (let k = 0; k < divergencePoints; k++) {
      const d = relative(divB[k], norm[k], Math.hypot(bx[k], by[k], bz[k]));
      if (d > largest || Number.isNaN(d)) [largest, where] = [d, k];
    }
    return { name, byConstruction, largest, at: [points.x[where], points.y[where], points.z[where]] };
  };
  const components = placedComponents(scene).field.map((placed) =>
    largestOf(placed.component.name, isSolenoidalByConstruction(placed.component.model), (parts, graph) => buildField(graph, parts.use(placed))),
  );
  if (!scene.turbulence.resolved) return components;
  return [...components, largestOf('resolved turbulence', true, (parts, graph) => parts.turbulentField() ?? [graph.constant(0), graph.constant(0), graph.constant(0)])];
}

/** Random points spread evenly over a scene's volume, from the scene's seed. */
export function randomPoints(scene: Scene, count: number): Points {
  const { radiusKpc, heightKpc } = scene.galaxy.volume;
  const stream = randomStream(scene.numerics.seed, 'points');
  const [x, y, z] = [0, 1, 2].map(() => new Float64Array(count));
  for (let k = 0; k < count; k++) {
    const radius = radiusKpc * Math.sqrt(stream.uniform());
    const azimuth = 2 * Math.PI * stream.uniform();
    x[k] = radius * Math.cos(azimuth);
    y[k] = radius * Math.sin(azimuth);
    z[k] = heightKpc * (2 * stream.uniform() - 1);
  }
  return { x, y, z };
}

/** Evaluates the field of one component at points: for checks of single models. */
export function probeComponent(scene: Scene, component: Component, points: Points): readonly Float64Array[] {
  const graph = new Graph();
  const placed = placedComponents(scene).field.find((item) => item.component === component);
  if (!placed) throw new Error(`component ${component.name} is not in the scene`);
  return evaluateNodes(graph, buildField(graph, new SceneGraph(graph, scene).use(placed)), scene, points);
}

function divergenceNodes(graph: Graph, field: Vector): readonly [NodeId, NodeId] {
  const rows = jacobian(graph, coordinatesOf(graph), field);
  const divergence = graph.add(rows[0][0], rows[1][1], rows[2][2]);
  const squares = rows.flatMap((row) => row.map((entry) => graph.power(entry, 2)));
  return [divergence, graph.power(graph.add(...squares), 0.5)];
}

function evaluateNodes(graph: Graph, nodes: readonly NodeId[], scene: Scene, { x, y, z }: Points): readonly Float64Array[] {
  const program = lowerGraph(graph, nodes, ['x', 'y', 'z'], coordinateSubstitution(graph));
  const values = sceneValues(scene, []);
  const parameters = Float64Array.from(program.parameters, (name) => values.get(name) ?? NaN);
  const columns = nodes.map(() => new Float64Array(x.length));
  compileJavaScript(program).evaluate(x.length, parameters, [x, y, z], columns, [], gridInputs(program, scene).grids);
  return columns;
}

function relative(divergence: number, norm: number, size: number): number {
  return norm <= uniformBelow * size ? 0 : Math.abs(divergence) / norm;
}

/** Where the flux of an even halo returns: the largest |B_r| of a component in the plane. */
export interface ReturnField {
  readonly name: string;
  readonly largestUG: number;
  readonly radiusKpc: number;
}

/** The largest |B_r| in the plane of every even component whose flux must return there (models with a `smoothing`). */
export function largestReturnField(scene: Scene): readonly ReturnField[] {
  const count = 400;
  const zeros = new Float64Array(count);
  const x = zeros.map((_, k) => (scene.galaxy.volume.radiusKpc * (k + 0.5)) / count);
  return scene.field
    .filter(({ choices, parameters }) => choices.parity === 'even' && 'smoothing' in parameters)
    .map((component) => {
      const [bx] = probeComponent(scene, component, { x, y: zeros, z: zeros });
      const best = bx.reduce((at, value, k) => (Math.abs(value) > Math.abs(bx[at]) ? k : at), 0);
      return { name: component.name, largestUG: Math.abs(bx[best]), radiusKpc: x[best] };
    });
}
