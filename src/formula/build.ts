import { nearestHint } from '../units/input-error.ts';
import { unaryFunctions, type UnaryName } from './functions.ts';
import type { Graph, NodeId } from './graph.ts';
import { differentiate } from './differentiate.ts';
import { FormulaError, parseFormula, type Tree } from './parse.ts';

/** Names a formula may use → nodes. */
export type Scope = ReadonlyMap<string, NodeId>;

/** Names that mean something else to a reader, so no parameter may take them. */
export const reservedNames: readonly string[] = ['e', 'i', 'pi'];

/**
 * Adds a formula to the graph and returns its node. Names come from `scope`; `pi` is known.
 * Throws FormulaError at the character of an unknown name, function or sign.
 */
export function buildFormula(graph: Graph, text: string, scope: Scope): NodeId {
  const fail = (problem: string, tree: Tree): never => {
    throw new FormulaError(problem, text, tree.at);
  };
  const lookUp = (tree: Tree & { kind: 'name' }): NodeId => {
    const known = scope.get(tree.name);
    if (known !== undefined) return known;
    if (tree.name === 'pi') return graph.constant(Math.PI);
    return fail(`unknown name "${tree.name}"${nearestHint(tree.name, scope.keys())}; known: ${[...scope.keys()].join(' ')}`, tree);
  };
  const build = (tree: Tree): NodeId => {
    switch (tree.kind) {
      case 'number':
        return graph.constant(tree.value);
      case 'name':
        return lookUp(tree);
      case 'choice':
        return graph.select(build(tree.args[0]), build(tree.args[1]), build(tree.args[2]));
      case 'call':
        if (tree.name === 'diff') {
          const leaf = tree.args[1].kind === 'name' ? lookUp(tree.args[1]) : undefined;
          if (leaf === undefined || !['variable', 'parameter'].includes(graph.node(leaf).kind)) {
            return fail('the second argument of diff is a coordinate or a parameter', tree.args[1]);
          }
          return differentiate(graph, build(tree.args[0]), leaf);
        }
        return call(graph, tree.name, tree.args.map(build));
      case 'operation':
        return buildChain(tree);
    }
  };
  // Walks down the left operands of a + b + c … in a loop: a long sum is deep only to the left.
  const buildChain = (top: Operation): NodeId => {
    const chain = [top];
    for (let left = top.args[0]; left.kind === 'operation'; left = left.args[0]) chain.push(left);
    let value = build(chain[chain.length - 1].args[0]);
    for (const tree of chain.reverse()) value = operate(graph, tree, [value, ...tree.args.slice(1).map(build)]);
    return value;
  };
  return build(parseFormula(text));
}

type Operation = Tree & { readonly kind: 'operation' };

function call(graph: Graph, name: string, args: readonly NodeId[]): NodeId {
  if (name === 'sqrt') return graph.power(args[0], 0.5);
  if (name === 'hypot') return graph.power(graph.add(graph.power(args[0], 2), graph.power(args[1], 2)), 0.5);
  if (name === 'min' || name === 'max' || name === 'atan2' || name === 'pow') return graph.binary(name, args[0], args[1]);
  if (!Object.hasOwn(unaryFunctions, name)) throw new Error(`function ${name} has no graph`);
  return graph.unary(name as UnaryName, args[0]);
}

function operate(graph: Graph, tree: Operation, [a, b]: readonly NodeId[]): NodeId {
  switch (tree.operator) {
    case '+':
      return graph.add(a, b);
    case '-':
      return graph.subtract(a, b);
    case '*':
      return graph.multiply(a, b);
    case '/':
      return graph.divide(a, b);
    case '^':
      return graph.binary('pow', a, b);
    case 'negate':
      return graph.negate(a);
    case '<':
      return graph.binary('less', a, b);
    case '<=':
      return graph.binary('lessOrEqual', a, b);
    case '>':
      return graph.binary('less', b, a);
    case '>=':
      return graph.binary('lessOrEqual', b, a);
    case '==':
      return graph.binary('equal', a, b);
    case '!=':
      return graph.select(graph.binary('equal', a, b), graph.constant(0), graph.constant(1));
  }
}
