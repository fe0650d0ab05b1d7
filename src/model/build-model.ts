import { buildFormula, type Scope } from '../formula/build.ts';
import type { Graph, NodeId } from '../formula/graph.ts';
import {
  cartesianFromCylindrical,
  coordinatesOf,
  curlCartesian,
  curlCylindrical,
  eulerField,
  type Vector,
} from '../formula/vector-calculus.ts';
import type { Modulation } from './modulation.ts';
import type { Model } from './types.ts';

/** A model with names for its parameters' run-time values and its choices made. */
export interface ModelUse {
  readonly model: Model;
  /** Graph node of each parameter. */
  readonly parameters: ReadonlyMap<string, NodeId>;
  /** The option chosen for each choice. */
  readonly choices: Readonly<Record<string, string>>;
  /** What the component's grids are known by: `path`/name. */
  readonly path?: string;
  /** What multiplies the model. */
  readonly modulation?: Modulation;
}

/** The field of a model, uG, as Cartesian components in the galaxy frame. */
export function buildField(graph: Graph, use: ModelUse): Vector {
  const c = coordinatesOf(graph);
  const scope = scopeOf(graph, use);
  const { potential, euler, field, armPotential = potential } = use.model.formulas;
  const { arms, hole } = use.modulation ?? {};
  const zero = graph.constant(0);
  const part = (formulas: Readonly<Record<string, string>>, key: string): NodeId => {
    if (!(key in formulas)) return zero;
    const value = buildFormula(graph, formulas[key], scope);
    return hole === undefined ? value : graph.multiply(hole, value);
  };
  const curl = (a: Readonly<Record<string, string>>, factor?: NodeId): Vector => {
    const times = (node: NodeId): NodeId => (factor === undefined ? node : graph.multiply(factor, node));
    return isCartesian(a)
      ? curlCartesian(graph, c, [times(part(a, 'x')), times(part(a, 'y')), times(part(a, 'z'))])
      : curlCylindrical(graph, c, [times(part(a, 'r')), times(part(a, 'phi')), times(part(a, 'z'))]);
  };
  let total: Vector = [zero, zero, zero];
  const add = (b: Vector): void => {
    total = [graph.add(total[0], b[0]), graph.add(total[1], b[1]), graph.add(total[2], b[2])];
  };
  if (potential) add(curl(potential));
  if (arms !== undefined && armPotential) add(curl(armPotential, arms));
  if (euler) {
    const factor = graph.multiply(hole ?? graph.constant(1), graph.add(graph.constant(1), arms ?? zero));
    add(eulerField(graph, c, graph.multiply(factor, buildFormula(graph, euler.a, scope)), buildFormula(graph, euler.b, scope)));
  }
  if (field) {
    if (isCartesian(field)) add([part(field, 'x'), part(field, 'y'), part(field, 'z')]);
    else add(cartesianFromCylindrical(graph, c, [part(field, 'r'), part(field, 'phi'), part(field, 'z')]));
  }
  return total;
}

/** The density of a model, cm^-3. */
export function buildDensity(graph: Graph, use: ModelUse): NodeId {
  const { density } = use.model.formulas;
  if (density === undefined) throw new Error(`model ${use.model.name} has no density`);
  const { arms, hole } = use.modulation ?? {};
  const value = buildFormula(graph, density, scopeOf(graph, use));
  return graph.multiply(value, hole ?? graph.constant(1), arms === undefined ? graph.constant(1) : graph.add(graph.constant(1), arms));
}

/** Surfaces where the model jumps or has a kink, as nodes of parameters alone. */
export function buildEdges(graph: Graph, use: ModelUse): { readonly z: readonly NodeId[]; readonly r: readonly NodeId[] } {
  const scope = scopeOf(graph, use);
  const { z = [], r = [] } = use.model.edges;
  return { z: z.map((text) => buildFormula(graph, text, scope)), r: r.map((text) => buildFormula(graph, text, scope)) };
}

/**
 * True where a field is divergence-free by the way it is given: by potentials, and at most an
 * azimuthal part of an axisymmetric model beside them. What users give directly is measured.
 */
export function isSolenoidalByConstruction(model: Model): boolean {
  const { field } = model.formulas;
  if (!field) return true;
  const scope = new Set(model.parameters.map((parameter) => parameter.name));
  const constant = Object.values(field).every((text) => scope.has(text.trim()) || Number.isFinite(Number(text)));
  if (isCartesian(field)) return constant;
  const mentionsAzimuth = /\b(phi|x|y)\b/;
  const texts = [field.phi ?? '', ...Object.values(model.define), ...Object.values(model.grids ?? {}).flat()];
  return Object.keys(field).every((key) => key === 'phi') && !texts.some((text) => mentionsAzimuth.test(text));
}

function isCartesian(components: Readonly<Record<string, string>>): boolean {
  return 'x' in components || 'y' in components;
}

/** Coordinates, then options and choices, then parameters, then grids, then the model's own definitions. */
function scopeOf(graph: Graph, { model, parameters, choices, path = '' }: ModelUse): Scope {
  const scope = new Map<string, NodeId>(Object.entries(coordinatesOf(graph)));
  for (const choice of model.choices) {
    for (const [option, value] of Object.entries(choice.options)) scope.set(option, graph.constant(value));
  }
  for (const choice of model.choices) scope.set(choice.name, graph.constant(choice.options[choices[choice.name]]));
  for (const [name, node] of parameters) scope.set(name, node);
  for (const [name, coordinates] of Object.entries(model.grids ?? {})) {
    const nodes = coordinates.map((text) => buildFormula(graph, text, scope));
    scope.set(name, graph.grid(`${path}/${name}`, nodes.map(() => 0), nodes));
  }
  for (const [name, text] of Object.entries(model.define)) scope.set(name, buildFormula(graph, text, scope));
  return scope;
}
