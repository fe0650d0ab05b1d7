import fc from 'fast-check';
import { buildFormula } from '../../src/formula/build.ts';
import { differentiate } from '../../src/formula/differentiate.ts';
import { Graph, type NodeId } from '../../src/formula/graph.ts';
import { interpretProgram } from '../../src/formula/javascript.ts';
import { lowerGraph } from '../../src/formula/lower.ts';

/** Names of tests' formulas → numbers. */
export type Values = Readonly<Record<string, number>>;

/** A graph with a variable for every name but those of one capital letter, which are parameters. */
export function graphOf(values: Values): { graph: Graph; scope: Map<string, NodeId> } {
  const graph = new Graph();
  const leaf = (name: string): NodeId => (/^[A-Z]$/.test(name) ? graph.parameter(name) : graph.variable(name));
  return { graph, scope: new Map(Object.keys(values).map((name) => [name, leaf(name)])) };
}

/** The number a node of a graph has. */
export function valueOf(graph: Graph, node: NodeId, values: Values): number {
  const lanes = Object.keys(values).filter((name) => !/^[A-Z]$/.test(name));
  const program = lowerGraph(graph, [node], lanes);
  const parameters = Float64Array.from(program.parameters, (name) => values[name]);
  return interpretProgram(program, parameters, lanes.map((name) => values[name]))[0];
}

/** The number a formula has: parsed, built, lowered and interpreted. */
export function evaluateFormula(text: string, values: Values = {}): number {
  const { graph, scope } = graphOf(values);
  return valueOf(graph, buildFormula(graph, text, scope), values);
}

/** The derivative of a formula by one of its names. */
export function evaluateDerivative(text: string, by: string, values: Values): number {
  const { graph, scope } = graphOf(values);
  const leaf = scope.get(by);
  if (leaf === undefined) throw new Error(`no ${by}`);
  return valueOf(graph, differentiate(graph, buildFormula(graph, text, scope), leaf), values);
}

/**
 * Random formulas of the names a, b (variables) and K (a parameter), all values near 1, in the
 * grammar this program shares with mathjs. Signs, powers and parentheses fall where they may.
 */
export const randomFormula: fc.Arbitrary<string> = fc.letrec<{ any: string }>((tie) => ({
  any: fc.oneof(
    { depthSize: 'small', withCrossShrink: true },
    fc.constantFrom('a', 'b', 'K', '2', '0.5', '3', '1.25e-1'),
    fc.tuple(tie('any'), fc.constantFrom(' + ', '-', '*', ' * ', '/'), tie('any')).map((parts) => parts.join('')),
    fc.tuple(tie('any'), fc.constantFrom('+', '-', '*', '/'), tie('any')).map((parts) => `(${parts.join('')})`),
    fc.tuple(fc.constantFrom('-', '+', ''), fc.constantFrom('a', 'b', 'K', '2'), fc.constantFrom('2', '3', '-1', '0.5', '-b', '2^a')).map(([sign, base, power]) => `${sign}${base}^${power}`),
    fc.tuple(fc.constantFrom('sin', 'cos', 'exp', 'tanh', 'atan', 'sqrt', 'log', 'sech', 'cosh', 'abs'), tie('any')).map(([name, inner]) => `${name}(${inner})`),
  ),
})).any;
