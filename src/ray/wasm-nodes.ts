import { float as f, int, vector as v, type Float, type Vector } from '../formula/wasm/code.ts';
import type { FunctionWriter } from '../formula/wasm/function.ts';
import { panelNodes } from './panel.ts';
import type { TransferLayout } from './wasm-layout.ts';

export const zero = int.constant(0);
/** Bytes of a function's values at the nodes of a panel. */
export const nodeBytes = 8 * panelNodes;
/** Offsets of the pairs of nodes that one vector holds. */
export const pairOffsets: readonly number[] = Array.from({ length: panelNodes / 2 }, (_, pair) => 16 * pair);

/** Values at the nodes of a panel, pair by pair. */
export type NodeValues = readonly Vector[];

/** The values that lie at an address. */
export function loadNodes(w: FunctionWriter, address: number): NodeValues {
  return pairOffsets.map((pair) => w.let(v.load(zero, address + pair)));
}

/** Σ of products, pair by pair. */
export function dot(a: NodeValues, b: NodeValues): Vector {
  return a.map((value, k) => v.multiply(value, b[k])).reduce((sum, term) => v.add(sum, term));
}

export function sumLanes(w: FunctionWriter, pair: Vector): Float {
  const known = w.let(pair);
  return f.add(v.lane(known, 0), v.lane(known, 1));
}

/** Size of the last two Legendre coefficients of a function. */
export function tail(w: FunctionWriter, layout: TransferLayout, values: NodeValues): Float {
  const row = (address: number): Vector => w.let(dot(values, pairOffsets.map((pair) => v.load(zero, address + pair))));
  const [a, b] = [row(layout.lastButOne), row(layout.last)];
  // Both sums at once: [Σa, Σb].
  const sums = w.let(v.abs(v.add(v.shuffle(a, 0, b, 0), v.shuffle(a, 1, b, 1))));
  return w.let(f.add(v.lane(sums, 0), v.lane(sums, 1)));
}

/** Largest size among the values of some functions. */
export function largest(w: FunctionWriter, ...functions: readonly NodeValues[]): Float {
  const pair = w.let(functions.flat().map((value) => v.abs(value)).reduce((size, value) => v.greater(size, value)));
  return w.let(f.max(v.lane(pair, 0), v.lane(pair, 1)));
}
