import type { Parity } from './grid.ts';
import type { Mode } from './modes.ts';
import type { DynamoOperator } from './operator.ts';
import type { Surroundings } from './profiles.ts';
import { nodeField, unknownsOf } from './unknowns.ts';

/** Shares of the equipartition field that a seed starts from: of the fastest mode, and everywhere in the disc. */
const modeShare = 0.3;
const everywhereShare = 0.05;

/**
 * A weak field to start from: the fastest mode, and an azimuthal field of its parity at every radius, so
 * that the outer disc need not wait for the inner one. B_phi > 0 where the mode is strongest.
 */
export function seedField({ grid, unknowns, equipartition, alpha }: DynamoOperator, { shape: [shape] }: Mode, parity: Parity, { radiusKpc, heightKpc }: Surroundings): Float64Array {
  const mode = nodeField(unknowns, shape);
  const strongest = mode.azimuthal.reduce((best, value, node) => (Math.abs(value) > Math.abs(mode.azimuthal[best]) ? node : best), 0);
  const factor = (modeShare * equipartition[strongest]) / mode.azimuthal[strongest];
  const nr = grid.radiiKpc.length;
  const layer = thicknessOf(alpha, grid.heightsKpc, nr);
  const azimuthal = mode.azimuthal.map((value, node) => {
    const [r, z] = [grid.radiiKpc[node % nr], grid.heightsKpc[Math.floor(node / nr)]];
    const isInside = r < radiusKpc && Math.abs(z) < heightKpc;
    const t = z / layer;
    const shapeOfZ = parity === 'odd' ? t * Math.exp(0.5 - t * t / 2) : parity === 'even' ? Math.exp(-t * t) : Math.exp(-t * t) * (1 + t);
    return factor * value + (isInside ? everywhereShare * equipartition[node] * shapeOfZ * Math.tanh((5 * r) / radiusKpc) : 0);
  });
  return unknownsOf(unknowns, { potential: mode.potential.map((value) => factor * value), azimuthal });
}

/** Mean |z| of |alpha|, kpc. */
function thicknessOf(alpha: Float64Array, heightsKpc: Float64Array, nr: number): number {
  let [sum, weight] = [0, 0];
  alpha.forEach((value, node) => {
    sum += Math.abs(value * heightsKpc[Math.floor(node / nr)]);
    weight += Math.abs(value);
  });
  return sum > 0 ? sum / weight : heightsKpc[heightsKpc.length - 1];
}
