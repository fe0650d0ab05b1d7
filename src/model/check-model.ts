import { Graph } from '../formula/graph.ts';
import { compileJavaScript } from '../formula/javascript.ts';
import { lowerGraph } from '../formula/lower.ts';
import { coordinateSubstitution } from '../formula/vector-calculus.ts';
import { parseQuantity } from '../units/quantity.ts';
import { buildDensity, buildEdges, buildField, type ModelUse } from './build-model.ts';
import { internalUnit } from './parameters.ts';
import type { Model, ModelCheck } from './types.ts';

/** One check value of a model file beside what the model gives. */
export interface CheckedValue {
  readonly check: ModelCheck;
  readonly expected: readonly number[];
  readonly given: readonly number[];
  /** |given - expected| over |expected|, as vectors; over 1 where the expected is zero. */
  readonly relativeError: number;
}

/** Evaluates a model at its own check values. Throws InputError where a formula cannot be read. */
export function checkModel(model: Model): readonly CheckedValue[] {
  return model.checks.map((check) => {
    const graph = new Graph();
    const use = useOf(graph, model, check);
    buildEdges(graph, use.use);
    const nodes = model.kind === 'field' ? buildField(graph, use.use) : [buildDensity(graph, use.use)];
    const program = lowerGraph(graph, nodes, ['x', 'y', 'z'], coordinateSubstitution(graph));
    const out = nodes.map(() => new Float64Array(1));
    const parameters = Float64Array.from(program.parameters, (name) => use.values.get(name) ?? NaN);
    compileJavaScript(program).evaluate(1, parameters, check.at.map((value) => Float64Array.of(value)), out, []);
    const given = out.map(([value]) => value);
    const expected = check.field ?? [check.density ?? NaN];
    const size = Math.hypot(...expected);
    const difference = Math.hypot(...given.map((value, k) => value - expected[k]));
    return { check, expected, given, relativeError: difference / (size > 0 ? size : 1) };
  });
}

/** Parses and resolves every formula of a model, so that what cannot be read is found before use. */
export function checkFormulas(model: Model): void {
  const graph = new Graph();
  const parameters = new Map(model.parameters.map(({ name }) => [name, graph.parameter(name)]));
  const choices = Object.fromEntries(model.choices.map(({ name, options }) => [name, Object.keys(options)[0]]));
  const use: ModelUse = { model, parameters, choices };
  buildEdges(graph, use);
  const nodes = model.kind === 'field' ? buildField(graph, use) : [buildDensity(graph, use)];
  lowerGraph(graph, nodes, ['x', 'y', 'z'], coordinateSubstitution(graph));
}

function useOf(graph: Graph, model: Model, check: ModelCheck): { use: ModelUse; values: ReadonlyMap<string, number> } {
  const values = new Map(
    model.parameters.map((parameter) => {
      const given = check.parameters[parameter.name] ?? parameter.default;
      const unit = internalUnit(parameter);
      const value = typeof given === 'string' ? parseQuantity(given, unit) : (given ?? NaN);
      return [parameter.name, value] as const;
    }),
  );
  const choices = Object.fromEntries(
    model.choices.map(({ name, options, default: usual }) => {
      const given = check.parameters[name];
      return [name, typeof given === 'string' ? given : (usual ?? Object.keys(options)[0])];
    }),
  );
  const parameters = new Map(model.parameters.map(({ name }) => [name, graph.parameter(name)]));
  return { use: { model, parameters, choices }, values };
}
