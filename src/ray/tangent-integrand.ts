import { differentiateAlong } from '../formula/differentiate.ts';
import { Graph, type NodeId } from '../formula/graph.ts';
import { lowerGraph, type Program } from '../formula/lower.ts';
import { coordinateSubstitution } from '../formula/vector-calculus.ts';
import type { Scene } from '../scene/types.ts';
import { integrandInputs, integrandNodes, output, type IntegrandInputs, type SpectralPoint } from './integrand.ts';
import { SceneGraph } from './scene-graph.ts';
import { compileSurfaces, type Surfaces } from './tangent-surfaces.ts';
import { directionOf, findTangentParameter, rateValues, type TangentParameter } from './tangent-parameters.ts';

/**
 * A scene's integrand and its derivatives by some of its numbers, as one program. Outputs come in
 * blocks, the values first, then one block per parameter: dφ/ds, dΣ/ds, then of each emission group
 * C⟨B^q⟩, C⟨B^q cos2θ⟩ and C⟨B^q sin2θ⟩, units as in `Integrand`, over the unit of the parameter.
 */
export interface TangentIntegrand {
  readonly program: Program;
  readonly parameters: readonly TangentParameter[];
  readonly groupOf: readonly number[];
  readonly groups: number;
  readonly hasDispersion: boolean;
  /** Outputs [block][place] that are 0 everywhere. */
  readonly isZero: readonly (readonly boolean[])[];
  inputs(scene: Scene): TangentInputs;
}

export interface TangentInputs extends IntegrandInputs {
  readonly surfaces: Surfaces;
}

/** Places in a block; `emission` begins those of the first group, three per group. */
export const place = { faraday: 0, dispersion: 1, emission: 2 } as const;

/** Outputs in a block. */
export function blockSize(groups: number): number {
  return place.emission + 3 * groups;
}

/** Compiles the derivatives of a scene by the numbers at paths that `findTangentParameter` knows. */
export function compileTangents(scene: Scene, spectrum: readonly SpectralPoint[], paths: readonly string[]): TangentIntegrand {
  const parameters = paths.map((path) => {
    const parameter = findTangentParameter(scene, path);
    if (!parameter) throw new Error(`rays have no derivative by ${path}`);
    return parameter;
  });
  const graph = new Graph();
  // A number at its default of 0 is left out of the integrand, but not of its own derivative.
  const fields = new SceneGraph(graph, scene, new Set(parameters.flatMap(({ leaves }) => leaves)));
  const { outputs, groupOf, groupFrequenciesHz, hasDispersion } = integrandNodes(graph, fields, scene, spectrum);
  const groups = groupFrequenciesHz.length;
  const values = [outputs[output.faraday], outputs[output.dispersion], ...outputs.slice(output.firstGroup).flatMap((density) =>
    [output.total, output.cosine, output.sine].map((moment) => graph.multiply(density, outputs[moment])))];
  const slopes = parameters.map((parameter) => {
    const direction = directionOf(graph, parameter, groups);
    const memo = new Map<NodeId, NodeId>();
    return values.map((value) => differentiateAlong(graph, value, direction, memo));
  });
  const blocks = [values, ...slopes];
  const program = lowerGraph(graph, blocks.flat(), ['x', 'y', 'z'], coordinateSubstitution(graph));
  const surfaces = compileSurfaces(scene, parameters);
  return {
    program,
    parameters,
    groupOf,
    groups,
    hasDispersion,
    isZero: blocks.map((block) => block.map((node) => graph.findConstant(node) === 0)),
    inputs: (given) => ({
      ...integrandInputs(program, given, groupFrequenciesHz, rateValues(given, parameters, groupFrequenciesHz)),
      surfaces: surfaces(given),
    }),
  };
}
