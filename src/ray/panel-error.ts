import { fastestDecay, tiniest, valleyDepth } from './accuracy.ts';
import { panelNodes, panelRule } from './panel.ts';

const n = panelNodes;

/** How the Legendre coefficients of values at a panel's nodes end. */
export interface Tail {
  readonly tail: number;
  readonly decay: number;
}

/**
 * Sizes of the Legendre coefficients 6 and 7 of one or two functions at the nodes, and by which
 * factor coefficients fall in two degrees: the larger of the last two such factors, at most 1.
 */
export function tailOf(values: Float64Array, others?: Float64Array): Tail {
  const [last, middle, first] = [pairSize(6, values, others), pairSize(4, values, others), pairSize(2, values, others)];
  const decay = Math.max(last / Math.max(middle, tiniest), middle / Math.max(first, tiniest));
  return { tail: last, decay: Math.min(Math.max(decay, fastestDecay), 1) };
}

function pairSize(degree: number, values: Float64Array, others: Float64Array | undefined): number {
  const own = Math.abs(coefficient(degree, values)) + Math.abs(coefficient(degree + 1, values));
  return others ? own + pairSize(degree, others, undefined) : own;
}

function coefficient(degree: number, values: Float64Array): number {
  let sum = 0;
  for (let j = 0; j < n; j++) sum += panelRule.legendre[degree * n + j] * values[j];
  return sum;
}

/**
 * Error of the mean over a panel: the rule is exact to degree 15, so coefficients that fall by
 * `decay` in two degrees leave tail · decay^4.75 of those at 16 and beyond. A lower power is safe
 * where they fall unevenly (null rules: Berntsen & Espelid 1991). `least` is the least share of
 * the tail that is believed.
 */
export function meanError({ tail, decay }: Tail, least: number): number {
  return tail * Math.max(decay * decay * decay, least);
}

/** Whether values fall between the ends of a panel and rise again, to less than `valleyDepth` of both sides. */
export function hasValley(values: Float64Array): boolean {
  let behind = 0;
  for (let i = 1; i < n - 1; i++) {
    behind = Math.max(behind, values[i - 1]);
    let ahead = 0;
    for (let j = i + 1; j < n; j++) ahead = Math.max(ahead, values[j]);
    if (values[i] < valleyDepth * Math.min(behind, ahead)) return true;
  }
  return false;
}

/** The largest size of values at the nodes. */
export function largestOf(values: Float64Array): number {
  let size = 0;
  for (let i = 0; i < n; i++) size = Math.max(size, Math.abs(values[i]));
  return size;
}
