import { highestOrder } from '../math/spline-grid.ts';
import { binaryFunctions, unaryFunctions, type BinaryName, type UnaryName } from './functions.ts';

/** Index of a node in its graph; arguments always have smaller indices. */
export type NodeId = number;

/** Number times node. */
export type Term = readonly [coefficient: number, node: NodeId];
/** Node to a constant power. */
export type Factor = readonly [node: NodeId, exponent: number];

/**
 * A node in normal form. Sums are constant + Σ coefficient·node, products are coefficient ·
 * Π node^exponent with constant exponents, both sorted and merged, so that r·(1/r) and a - a
 * cancel as the graph is built.
 */
export type GraphNode =
  | { readonly kind: 'constant'; readonly value: number }
  | { readonly kind: 'variable'; readonly name: string }
  | { readonly kind: 'parameter'; readonly name: string }
  | { readonly kind: 'sum'; readonly constant: number; readonly terms: readonly Term[] }
  | { readonly kind: 'product'; readonly coefficient: number; readonly factors: readonly Factor[] }
  | { readonly kind: 'unary'; readonly name: UnaryName; readonly argument: NodeId }
  | { readonly kind: 'binary'; readonly name: BinaryName; readonly left: NodeId; readonly right: NodeId }
  | { readonly kind: 'select'; readonly condition: NodeId; readonly yes: NodeId; readonly no: NodeId }
  | { readonly kind: 'table'; readonly table: string; readonly order: number; readonly argument: NodeId }
  | { readonly kind: 'grid'; readonly grid: string; readonly orders: readonly number[]; readonly coordinates: readonly NodeId[] };

/**
 * A hash-consed expression graph: equal expressions are one node. Variables differ from sample
 * to sample, parameters are the same for all samples of a run.
 */
export class Graph {
  private readonly nodes: GraphNode[] = [];
  private readonly varying: boolean[] = [];
  private readonly known = new Map<string, NodeId>();

  /** The node behind an id. */
  node(id: NodeId): GraphNode {
    return this.nodes[id];
  }

  get size(): number {
    return this.nodes.length;
  }

  /** Whether the node depends on a variable, and so differs between samples. */
  isVarying(id: NodeId): boolean {
    return this.varying[id];
  }

  /** The number a node stands for, or undefined where it is no constant. */
  findConstant(id: NodeId): number | undefined {
    const node = this.nodes[id];
    return node.kind === 'constant' ? node.value : undefined;
  }

  /** The nodes that a node is made of, powers' bases and summands included. */
  argumentsOf(id: NodeId): readonly NodeId[] {
    const node = this.nodes[id];
    switch (node.kind) {
      case 'constant':
      case 'variable':
      case 'parameter':
        return [];
      case 'sum':
        return node.terms.map(([, term]) => term);
      case 'product':
        return node.factors.map(([base]) => base);
      case 'unary':
      case 'table':
        return [node.argument];
      case 'grid':
        return node.coordinates;
      case 'binary':
        return [node.left, node.right];
      case 'select':
        return [node.condition, node.yes, node.no];
    }
  }

  constant(value: number): NodeId {
    return this.intern({ kind: 'constant', value }, `c${Object.is(value, -0) ? 0 : value}`, false);
  }

  variable(name: string): NodeId {
    return this.intern({ kind: 'variable', name }, `v${name}`, true);
  }

  parameter(name: string): NodeId {
    return this.intern({ kind: 'parameter', name }, `p${name}`, false);
  }

  add(...ids: readonly NodeId[]): NodeId {
    return this.sum(ids.map((id) => [1, id]));
  }

  subtract(left: NodeId, right: NodeId): NodeId {
    return this.sum([[1, left], [-1, right]]);
  }

  negate(id: NodeId): NodeId {
    return this.multiply(this.constant(-1), id);
  }

  divide(left: NodeId, right: NodeId): NodeId {
    return this.multiply(left, this.power(right, -1));
  }

  /** Σ coefficient·node in normal form; nested sums are flattened and like terms merged. */
  sum(terms: readonly Term[]): NodeId {
    let constant = 0;
    const merged = new Map<NodeId, number>();
    const collect = (coefficient: number, id: NodeId): void => {
      const node = this.nodes[id];
      if (node.kind === 'constant') constant += coefficient * node.value;
      else if (node.kind === 'sum') {
        constant += coefficient * node.constant;
        for (const [inner, innerId] of node.terms) collect(coefficient * inner, innerId);
      } else if (node.kind === 'product' && node.coefficient !== 1) {
        collect(coefficient * node.coefficient, this.product(1, node.factors));
      } else merged.set(id, (merged.get(id) ?? 0) + coefficient);
    };
    for (const [coefficient, id] of terms) collect(coefficient, id);
    constant = this.joinExpm1(constant, merged);
    const kept = [...merged].filter(([, coefficient]) => coefficient !== 0).sort((a, b) => a[0] - b[0]);
    if (kept.length === 0) return this.constant(constant);
    if (kept.length === 1 && constant === 0) return this.scale(kept[0][1], kept[0][0]);
    const sorted = kept.map(([id, coefficient]): Term => [coefficient, id]);
    const varying = sorted.some(([, id]) => this.varying[id]);
    let key = `s${constant}`;
    for (const [coefficient, id] of sorted) key += `;${coefficient},${id}`;
    return this.intern({ kind: 'sum', constant, terms: sorted }, key, varying);
  }

  /** c - c·e^w becomes -c·expm1(w), which keeps its digits where w → 0. */
  private joinExpm1(constant: number, terms: Map<NodeId, number>): number {
    if (constant === 0) return constant;
    for (const [id, coefficient] of terms) {
      const node = this.nodes[id];
      if (coefficient !== -constant || node.kind !== 'unary' || node.name !== 'exp') continue;
      terms.delete(id);
      const joined = this.unary('expm1', node.argument);
      terms.set(joined, (terms.get(joined) ?? 0) + coefficient);
      return 0;
    }
    return constant;
  }

  private scale(coefficient: number, id: NodeId): NodeId {
    const { coefficient: own, factors } = this.asProduct(id);
    return this.product(coefficient * own, factors);
  }

  multiply(...ids: readonly NodeId[]): NodeId {
    let coefficient = 1;
    const factors: Factor[] = [];
    for (const id of ids) {
      const part = this.asProduct(id);
      coefficient *= part.coefficient;
      factors.push(...part.factors);
    }
    return this.product(coefficient, factors);
  }

  /** node^exponent for a constant exponent. */
  power(id: NodeId, exponent: number): NodeId {
    if (exponent === 0) return this.constant(1);
    if (exponent === 1) return id;
    const value = this.findConstant(id);
    if (value !== undefined) return this.constant(Math.pow(value, exponent));
    if (!Number.isInteger(exponent)) return this.product(1, [[id, exponent]]);
    const { coefficient, factors } = this.asProduct(id);
    return this.product(Math.pow(coefficient, exponent), factors.map(([base, e]) => [base, e * exponent]));
  }

  private asProduct(id: NodeId): { coefficient: number; factors: readonly Factor[] } {
    const node = this.nodes[id];
    if (node.kind === 'constant') return { coefficient: node.value, factors: [] };
    if (node.kind === 'product') return node;
    return { coefficient: 1, factors: [[id, 1]] };
  }

  private product(coefficient: number, factors: readonly Factor[]): NodeId {
    const merged: [id: NodeId, exponent: number][] = [];
    let scale = coefficient;
    // Few factors: a search through a list is quicker than a map.
    const collect = (id: NodeId, exponent: number): void => {
      const found = merged.find((factor) => factor[0] === id);
      if (found) found[1] += exponent;
      else merged.push([id, exponent]);
    };
    for (const [id, exponent] of factors) collect(id, exponent);
    // A product raised to what has become a whole power is multiplied out.
    const wholes = merged.filter(([id, exponent]) => this.nodes[id].kind === 'product' && Number.isInteger(exponent));
    for (const whole of wholes) {
      const [id, exponent] = whole;
      const node = this.nodes[id];
      if (node.kind !== 'product') continue;
      whole[1] = 0;
      scale *= Math.pow(node.coefficient, exponent);
      for (const [inner, innerExponent] of node.factors) collect(inner, innerExponent * exponent);
    }
    const kept = merged.filter(([, exponent]) => exponent !== 0).sort((a, b) => a[0] - b[0]);
    if (kept.length === 0 || scale === 0) return this.constant(scale);
    if (scale === 1 && kept.length === 1 && kept[0][1] === 1) return kept[0][0];
    const varying = kept.some(([id]) => this.varying[id]);
    let key = `m${scale}`;
    for (const [id, exponent] of kept) key += `;${id},${exponent}`;
    return this.intern({ kind: 'product', coefficient: scale, factors: kept }, key, varying);
  }

  unary(name: UnaryName, argument: NodeId): NodeId {
    const value = this.findConstant(argument);
    if (value !== undefined) return this.constant(unaryFunctions[name](value));
    return this.intern({ kind: 'unary', name, argument }, `u${name};${argument}`, this.varying[argument]);
  }

  binary(name: BinaryName, left: NodeId, right: NodeId): NodeId {
    const [a, b] = [this.findConstant(left), this.findConstant(right)];
    if (name === 'pow' && b !== undefined) return this.power(left, b);
    if (a !== undefined && b !== undefined) return this.constant(binaryFunctions[name](a, b));
    const varying = this.varying[left] || this.varying[right];
    return this.intern({ kind: 'binary', name, left, right }, `b${name};${left};${right}`, varying);
  }

  /** `yes` where the condition is not zero, else `no`. */
  select(condition: NodeId, yes: NodeId, no: NodeId): NodeId {
    const value = this.findConstant(condition);
    if (value !== undefined) return value !== 0 ? yes : no;
    if (yes === no) return yes;
    const varying = this.varying[condition] || this.varying[yes] || this.varying[no];
    return this.intern({ kind: 'select', condition, yes, no }, `?${condition};${yes};${no}`, varying);
  }

  /** Value (order 0) or derivative of a function tabulated on [0, 1], filled in at run time. */
  table(table: string, order: number, argument: NodeId): NodeId {
    return this.intern({ kind: 'table', table, order, argument }, `t${table};${order};${argument}`, this.varying[argument]);
  }

  /**
   * Value (orders 0) or derivatives of a function given on a grid that is filled in at run time, at
   * two or three coordinates counted in samples.
   */
  grid(grid: string, orders: readonly number[], coordinates: readonly NodeId[]): NodeId {
    if (orders.some((order) => order > highestOrder)) return this.constant(0);
    const varying = coordinates.some((id) => this.varying[id]);
    return this.intern({ kind: 'grid', grid, orders, coordinates }, `g${grid};${orders.join()};${coordinates.join()}`, varying);
  }

  private intern(node: GraphNode, key: string, varying: boolean): NodeId {
    const found = this.known.get(key);
    if (found !== undefined) return found;
    const id = this.nodes.push(node) - 1;
    this.varying.push(varying);
    this.known.set(key, id);
    return id;
  }
}
