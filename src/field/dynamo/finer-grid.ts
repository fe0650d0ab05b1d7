import type { Mode } from './modes.ts';
import type { DynamoOperator } from './operator.ts';
import { nodeField, unknownsOf } from './unknowns.ts';

/**
 * A field brought from a grid to one of twice the cells, by straight lines between nodes: exact where
 * nodes fall together, good enough to start from elsewhere.
 */
export function toFinerGrid(coarse: DynamoOperator, fine: DynamoOperator, x: Float64Array): Float64Array {
  const field = nodeField(coarse.unknowns, x);
  const spread = (values: Float64Array): Float64Array => {
    const [nr, nz] = [coarse.grid.radiiKpc.length, coarse.grid.heightsKpc.length];
    const [radial, vertical] = [positions(fine.grid.radiiKpc, coarse.grid.radiiKpc), positions(fine.grid.heightsKpc, coarse.grid.heightsKpc)];
    const at = (i: number, j: number): number => values[Math.min(i, nr - 1) + Math.min(j, nz - 1) * nr];
    return Float64Array.from({ length: radial.length * vertical.length }, (_, node) => {
      const [u, v] = [radial[node % radial.length], vertical[Math.floor(node / radial.length)]];
      const [i, j] = [Math.floor(u), Math.floor(v)];
      const low = at(i, j) * (1 - u + i) + at(i + 1, j) * (u - i);
      const high = at(i, j + 1) * (1 - u + i) + at(i + 1, j + 1) * (u - i);
      return low * (1 - v + j) + high * (v - j);
    });
  };
  return unknownsOf(fine.unknowns, { potential: spread(field.potential), azimuthal: spread(field.azimuthal) });
}

/** Modes brought to a finer grid, to be refined there. */
export function modesToFinerGrid(coarse: DynamoOperator, fine: DynamoOperator, modes: readonly Mode[]): readonly Mode[] {
  return modes.map((mode) => ({ ...mode, shape: [toFinerGrid(coarse, fine, mode.shape[0]), toFinerGrid(coarse, fine, mode.shape[1])] }));
}

/** Where fine nodes lie between coarse ones, counted in coarse nodes. */
function positions(fine: Float64Array, coarse: Float64Array): Float64Array {
  let k = 0;
  return fine.map((value) => {
    while (k < coarse.length - 2 && coarse[k + 1] <= value) k++;
    return Math.min(coarse.length - 1, k + (value - coarse[k]) / (coarse[k + 1] - coarse[k]));
  });
}
