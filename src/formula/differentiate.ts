import type { UnaryName } from './functions.ts';
import type { Graph, NodeId } from './graph.ts';

type Slope = (graph: Graph, argument: NodeId, self: NodeId) => NodeId;

const square = (g: Graph, u: NodeId): NodeId => g.power(u, 2);

/** d f(u)/du of every function of one argument, written with the graph's own operations. */
const slopes: Readonly<Record<UnaryName, Slope>> = {
  abs: (g, u) => g.unary('sign', u),
  sign: (g) => g.constant(0),
  exp: (_g, _u, self) => self,
  expm1: (g, u) => g.unary('exp', u),
  log: (g, u) => g.power(u, -1),
  sin: (g, u) => g.unary('cos', u),
  cos: (g, u) => g.negate(g.unary('sin', u)),
  tan: (g, u) => g.power(g.unary('cos', u), -2),
  asin: (g, u) => g.power(g.subtract(g.constant(1), square(g, u)), -0.5),
  acos: (g, u) => g.negate(g.power(g.subtract(g.constant(1), square(g, u)), -0.5)),
  atan: (g, u) => g.power(g.add(g.constant(1), square(g, u)), -1),
  sinh: (g, u) => g.unary('cosh', u),
  cosh: (g, u) => g.unary('sinh', u),
  tanh: (g, u) => square(g, g.unary('sech', u)),
  sech: (g, u, self) => g.negate(g.multiply(self, g.unary('tanh', u))),
  erf: (g, u) => g.multiply(g.constant(2 / Math.sqrt(Math.PI)), g.unary('exp', g.negate(square(g, u)))),
  incompleteGamma2: (g, u) => g.multiply(u, g.unary('exp', g.negate(u))),
};

/** A direction to differentiate along: how fast leaves, and what tables hold, change with one number. */
export interface Direction {
  /** d(leaf) of every variable or parameter that changes. */
  readonly leaves: ReadonlyMap<NodeId, NodeId>;
  /** Tables whose functions change themselves: the table of the change, and a factor on it. */
  readonly tables?: ReadonlyMap<string, { readonly table: string; readonly rate: NodeId }>;
}

/**
 * ∂node/∂leaf as a node of the same graph. The leaf is a variable or a parameter; all other
 * leaves are held fixed, r and x among them: chain rules between coordinates are the caller's.
 * At kinks (abs, min, max, conditions) the derivative of the branch taken.
 */
export function differentiate(graph: Graph, node: NodeId, leaf: NodeId, memo = new Map<NodeId, NodeId>()): NodeId {
  return differentiateAlong(graph, node, { leaves: new Map([[leaf, graph.constant(1)]]) }, memo);
}

/**
 * The derivative of a node along a direction, as a node of the same graph: forward differentiation
 * in which equal subexpressions, of values and derivatives alike, are one node. `memo` keeps what
 * is known between calls for one direction.
 */
export function differentiateAlong(graph: Graph, node: NodeId, direction: Direction, memo = new Map<NodeId, NodeId>()): NodeId {
  const known = memo.get(node);
  if (known !== undefined) return known;
  const result = direction.leaves.get(node) ?? derivative(graph, node, direction, (id) => differentiateAlong(graph, id, direction, memo));
  memo.set(node, result);
  return result;
}

function derivative(graph: Graph, id: NodeId, { tables }: Direction, of: (id: NodeId) => NodeId): NodeId {
  const zero = graph.constant(0);
  const node = graph.node(id);
  switch (node.kind) {
    case 'constant':
    case 'variable':
    case 'parameter':
      return zero;
    case 'sum':
      return graph.sum(node.terms.map(([coefficient, term]) => [coefficient, of(term)]));
    case 'product': {
      const parts = node.factors.map(([base, exponent], skip) => {
        const inner = of(base);
        if (inner === zero) return zero;
        const rest = node.factors.filter((_, index) => index !== skip).map(([other, e]) => graph.power(other, e));
        return graph.multiply(graph.constant(node.coefficient * exponent), graph.power(base, exponent - 1), inner, ...rest);
      });
      return graph.add(...parts);
    }
    case 'unary': {
      const inner = of(node.argument);
      return inner === zero ? zero : graph.multiply(slopes[node.name](graph, node.argument, id), inner);
    }
    case 'binary':
      return binaryDerivative(graph, id, of);
    case 'select':
      return graph.select(node.condition, of(node.yes), of(node.no));
    case 'table': {
      const inner = of(node.argument);
      const along = inner === zero ? zero : graph.multiply(graph.table(node.table, node.order + 1, node.argument), inner);
      const change = tables?.get(node.table);
      return change ? graph.add(along, graph.multiply(change.rate, graph.table(change.table, node.order, node.argument))) : along;
    }
    case 'grid': {
      const parts = node.coordinates.map((coordinate, axis) => {
        const inner = of(coordinate);
        if (inner === zero) return zero;
        const orders = node.orders.map((order, k) => (k === axis ? order + 1 : order));
        return graph.multiply(graph.grid(node.grid, orders, node.coordinates), inner);
      });
      return graph.add(...parts);
    }
  }
}

function binaryDerivative(graph: Graph, id: NodeId, of: (id: NodeId) => NodeId): NodeId {
  const zero = graph.constant(0);
  const node = graph.node(id);
  if (node.kind !== 'binary') return zero;
  const { name, left, right } = node;
  const [dLeft, dRight] = [of(left), of(right)];
  if (dLeft === zero && dRight === zero) return zero;
  switch (name) {
    case 'min':
      return graph.select(graph.binary('lessOrEqual', left, right), dLeft, dRight);
    case 'max':
      return graph.select(graph.binary('lessOrEqual', right, left), dLeft, dRight);
    case 'atan2': {
      const square = graph.add(graph.power(left, 2), graph.power(right, 2));
      return graph.divide(graph.subtract(graph.multiply(right, dLeft), graph.multiply(left, dRight)), square);
    }
    case 'pow': {
      // Where the base cannot vanish, the power at hand serves its own derivative.
      const lower = isPositive(graph, left) ? graph.divide(id, left) : graph.binary('pow', left, graph.subtract(right, graph.constant(1)));
      const byBase = dLeft === zero ? zero : graph.multiply(right, lower, dLeft);
      if (dRight === zero) return byBase;
      // x^n ln x → 0 at x = 0, where the logarithm alone has no value.
      const byExponent = graph.multiply(id, graph.unary('log', left), dRight);
      return graph.add(byBase, graph.select(graph.binary('equal', left, zero), zero, byExponent));
    }
    case 'less':
    case 'lessOrEqual':
    case 'equal':
      return zero;
  }
}

/** Whether a node is a sum of squares and a positive constant: it is never 0. */
function isPositive(graph: Graph, id: NodeId): boolean {
  const node = graph.node(id);
  if (node.kind !== 'sum' || !(node.constant > 0)) return false;
  return node.terms.every(([coefficient, term]) => {
    const inner = graph.node(term);
    return coefficient > 0 && inner.kind === 'product' && inner.coefficient > 0 && inner.factors.every(([, exponent]) => exponent % 2 === 0);
  });
}
