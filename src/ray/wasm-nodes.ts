import { float as f, int, vector as v, type Float, type Int, type Vector } from '../formula/wasm/code.ts';
import type { FunctionWriter } from '../formula/wasm/function.ts';
import { panelNodes } from './panel.ts';
import { fastestDecay, tiniest, valleyDepth } from './accuracy.ts';
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

/** Size of a function's last Legendre coefficients, and by which factor they fall: `tailOf` of panel-error.ts. */
export interface Tail {
  readonly tail: Float;
  readonly decay: Float;
}

/** Measures the tail of one or two functions whose values at the nodes lie at these addresses. */
export function measureTail(w: FunctionWriter, layout: TransferLayout, ...addresses: readonly Int[]): Tail {
  const sizes = addresses.map((address) => pairSizes(w, layout, address)).reduce((sum, more) => sum.map((size, k) => w.let(v.add(size, more[k]))));
  // [first, middle] and [middle, last], each both coefficients of a pair added.
  const [first, middle, last] = sizes;
  const early = w.let(v.add(v.shuffle(first, 0, middle, 0), v.shuffle(first, 1, middle, 1)));
  const late = w.let(v.add(v.shuffle(middle, 0, last, 0), v.shuffle(middle, 1, last, 1)));
  const factors = w.let(v.divide(late, v.max(early, w.constant(tiniest))));
  const decay = f.min(f.max(f.max(v.lane(factors, 0), v.lane(factors, 1)), f.constant(fastestDecay)), f.constant(1));
  return { tail: w.let(v.lane(late, 1)), decay: w.let(decay) };
}

/** |c_k|, |c_k+1| for k = 2, 4 and 6: even ones from sums of mirrored nodes, odd ones from differences. */
function pairSizes(w: FunctionWriter, { legendrePairs }: TransferLayout, address: Int): Vector[] {
  const negateSecond = v.withLane(w.constant(0), 1, f.constant(-0));
  const mirrored = Array.from({ length: panelNodes / 2 }, (_, j) => {
    const [far, near] = [v.loadSplat(address, 8 * j), v.loadSplat(address, 8 * (panelNodes - 1 - j))];
    return w.let(v.add(near, v.xor(far, negateSecond)));
  });
  return [2, 4, 6].map((degree) => {
    const terms = mirrored.map((value, j) => v.multiply(value, v.load(zero, legendrePairs + 8 * panelNodes * (degree / 2) + 16 * j)));
    return w.let(v.abs(terms.reduce((sum, term) => v.add(sum, term))));
  });
}

/** Error of the mean over a panel, at least this share of the tail: `meanError` of panel-error.ts. */
export function meanError(w: FunctionWriter, { tail, decay }: Tail, least = f.constant(0)): Float {
  return w.let(f.multiply(tail, f.max(f.multiply(f.multiply(decay, decay), decay), least)));
}

/** Whether values at the nodes have a valley: `hasValley` of panel-error.ts. */
export function hasValley(w: FunctionWriter, values: NodeValues): Int {
  const numbers = values.flatMap((pair) => [w.let(v.lane(pair, 0)), w.let(v.lane(pair, 1))]);
  const largestUpTo = (list: readonly Float[]): Float[] => {
    let size = f.constant(0);
    return list.map((value) => (size = w.let(f.max(size, value))));
  };
  const behind = largestUpTo(numbers);
  const ahead = largestUpTo([...numbers].reverse()).reverse();
  const valleys = numbers.slice(1, -1).map((value, k) => f.less(value, f.multiply(f.constant(valleyDepth), f.min(behind[k], ahead[k + 2]))));
  return valleys.reduce((any, valley) => int.or(any, valley));
}

/** Largest size among the values of some functions. */
export function largest(w: FunctionWriter, ...functions: readonly NodeValues[]): Float {
  const pair = w.let(functions.flat().map((value) => v.abs(value)).reduce((size, value) => v.greater(size, value)));
  return w.let(f.max(v.lane(pair, 0), v.lane(pair, 1)));
}
