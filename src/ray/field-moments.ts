import type { Graph, NodeId } from '../formula/graph.ts';
import { addOrderedMoments, type OrderedField } from './ordered-moments.ts';
import { smallestFieldSquared } from './field-size.ts';

/** The field across the line of sight, uG, as nodes: its regular part and what is random on top of it. */
export interface FieldAcross {
  /** Along the receding half of the major axis, and towards the minor one. */
  readonly major: NodeId;
  readonly minor: NodeId;
  /** rms of one component of isotropic turbulence. */
  readonly rms?: NodeId;
  /** A field of changing sign along one direction. */
  readonly ordered?: OrderedField;
}

/** ⟨B^q⟩, ⟨B^q cos2θ⟩, ⟨B^q sin2θ⟩ for the electric vector, which is perpendicular to the field. */
export function fieldMoments(graph: Graph, across: FieldAcross): readonly [NodeId, NodeId, NodeId] {
  const { major, minor, rms, ordered } = across;
  if (ordered) return addOrderedMoments(graph, { major, minor, rms }, ordered);
  const squared = graph.add(graph.power(major, 2), graph.power(minor, 2));
  const halfPower = graph.parameter('halfPower');
  const twist = graph.multiply(graph.constant(-2), major, minor);
  const difference = graph.subtract(graph.power(minor, 2), graph.power(major, 2));
  const random = rms === undefined ? graph.constant(0) : graph.multiply(graph.constant(2), graph.power(rms, 2));
  const size = graph.add(squared, random, graph.constant(smallestFieldSquared));
  const power = graph.binary('pow', size, graph.subtract(halfPower, graph.constant(1)));
  if (rms === undefined) return [graph.multiply(power, size), graph.multiply(power, difference), graph.multiply(power, twist)];
  const share = graph.divide(squared, size);
  const aligned = graph.multiply(power, graph.table('riceAligned', 0, share));
  return [
    graph.multiply(power, size, graph.table('riceTotal', 0, share)),
    graph.multiply(aligned, difference),
    graph.multiply(aligned, twist),
  ];
}
