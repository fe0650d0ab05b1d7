import { InputError } from '../units/input-error.ts';

/** Share of a range within which numbers count as equal. */
export const rounding = 1e-9;

/** Throws InputError unless there are at least two edges, all finite, each above the last. */
export function checkEdges(edgesKpc: readonly number[], what: string): void {
  const rising = edgesKpc.every((edge, k) => Number.isFinite(edge) && (k === 0 || edge > edgesKpc[k - 1]));
  if (edgesKpc.length < 2 || !rising) {
    throw new InputError(`the edges of ${what} are ${edgesKpc.join(', ')} kpc; give two or more that rise`);
  }
}

/**
 * The interval between edges that holds an offset, or -1; -1 for NaN. The lower edge is included, with
 * all that is nearer to it than rounding, so that pixels on an edge do not fall to chance.
 */
export function findBin(edges: readonly number[], offset: number): number {
  const value = offset + rounding * (edges[edges.length - 1] - edges[0]);
  if (!(value >= edges[0] && value < edges[edges.length - 1])) return -1;
  let bin = 0;
  while (value >= edges[bin + 1]) bin++;
  return bin;
}
