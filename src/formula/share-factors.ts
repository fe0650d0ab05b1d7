import type { Factor, Graph, NodeId } from './graph.ts';

/** A factor of a product: a node to a power, or two items multiplied once for several products. */
export type Item = { readonly kind: 'power'; readonly factor: Factor } | { readonly kind: 'pair'; readonly first: number; readonly second: number };

/** How products are to be multiplied out: items by index, and the items of every product with two or more varying factors. */
export interface SharedFactors {
  readonly items: readonly Item[];
  readonly products: ReadonlyMap<NodeId, readonly number[]>;
}

/**
 * Plans the products under `outputs` so that less is multiplied: exponentials of a product become
 * one where one of them has no other use, and pairs of factors that several products have in
 * common are multiplied once, the commonest first.
 */
export function shareFactors(graph: Graph, outputs: readonly NodeId[], resolve: (id: NodeId) => NodeId): SharedFactors {
  const { reached, uses } = survey(graph, outputs, resolve);
  const items: Item[] = [];
  const known = new Map<string, number>();
  const products = new Map<NodeId, number[]>();
  for (const id of reached) {
    const node = graph.node(id);
    if (node.kind !== 'product') continue;
    const varying = mergeExponentials(graph, node.factors.filter(([base]) => graph.isVarying(base)), uses);
    const list = varying.map((factor) => {
      const key = factor.join('^');
      const index = known.get(key) ?? items.push({ kind: 'power', factor }) - 1;
      known.set(key, index);
      return index;
    });
    products.set(id, list.sort((a, b) => a - b));
  }
  pairUp(items, [...products.values()]);
  return { items, products };
}

/** Nodes under the outputs, and how many nodes read each. */
function survey(graph: Graph, outputs: readonly NodeId[], resolve: (id: NodeId) => NodeId): { reached: ReadonlySet<NodeId>; uses: ReadonlyMap<NodeId, number> } {
  const reached = new Set<NodeId>();
  const uses = new Map<NodeId, number>();
  const visit = (named: NodeId): void => {
    const id = resolve(named);
    uses.set(id, (uses.get(id) ?? 0) + 1);
    if (reached.has(id)) return;
    reached.add(id);
    graph.argumentsOf(id).forEach(visit);
  };
  outputs.forEach(visit);
  return { reached, uses };
}

/** e^a e^b → e^(a+b) where at least one of them is read by this product alone. */
function mergeExponentials(graph: Graph, factors: readonly Factor[], uses: ReadonlyMap<NodeId, number>): readonly Factor[] {
  const isExponential = ([base]: Factor): boolean => {
    const node = graph.node(base);
    return node.kind === 'unary' && node.name === 'exp';
  };
  const exponentials = factors.filter(isExponential);
  if (exponentials.length < 2 || !exponentials.some(([base]) => uses.get(base) === 1)) return factors;
  const argument = graph.sum(
    exponentials.map(([base, exponent]) => {
      const node = graph.node(base);
      return [exponent, node.kind === 'unary' ? node.argument : base];
    }),
  );
  return [...factors.filter((factor) => !isExponential(factor)), [graph.unary('exp', argument), 1]];
}

/** Replaces the commonest pair of items by one item, again and again, until no two products share a pair. */
function pairUp(items: Item[], products: number[][]): void {
  const base = 65536;
  const holders = new Map<number, Set<number[]>>();
  const note = (list: number[], change: 'add' | 'delete'): void => {
    for (let i = 0; i < list.length; i++) {
      for (let j = i + 1; j < list.length; j++) {
        const key = list[i] * base + list[j];
        const holding = holders.get(key) ?? new Set();
        holding[change](list);
        holders.set(key, holding);
      }
    }
  };
  products.forEach((list) => note(list, 'add'));
  for (;;) {
    let [best, most] = [-1, 1];
    for (const [key, holding] of holders) if (holding.size > most) [best, most] = [key, holding.size];
    if (best < 0) return;
    const [first, second] = [Math.floor(best / base), best % base];
    const pair = items.push({ kind: 'pair', first, second }) - 1;
    for (const list of [...(holders.get(best) ?? [])]) {
      note(list, 'delete');
      const rest = list.filter((index) => index !== first && index !== second);
      list.length = 0;
      // The new item has the largest index, so that the list stays sorted.
      list.push(...rest, pair);
      note(list, 'add');
    }
  }
}
