import { gaussLegendre } from '../math/quadrature.ts';

/** Writes a function's values at points of the galaxy frame, kpc. */
export type VolumeFunction = (x: Float64Array, y: Float64Array, z: Float64Array, into: Float64Array) => void;

/** A cylinder, |z| ≤ height, with the radii and heights where a function jumps. */
export interface Cylinder {
  readonly radiusKpc: number;
  readonly heightKpc: number;
  readonly edges: { readonly zKpc: readonly number[]; readonly rKpc: readonly number[] };
}

const rule = gaussLegendre(6);
const n = rule.nodes.length;
const fewestAzimuths = 8;
const mostAzimuths = 2048;
const deepest = 30;
/** Breaks as shares of radius and height, graded towards the axis and the plane. */
const radii = [0, 0.03, 0.15, 0.5, 1];
const heights = [0, 0.05, 0.25, 1];

interface Box {
  readonly r: readonly [number, number];
  readonly z: readonly [number, number];
  readonly integral: number;
  readonly depth: number;
}

/**
 * ∫ f dV over a cylinder to a relative tolerance, kpc³ times the unit of f ≥ 0: Gauss–Legendre
 * boxes in r and z, quartered until four parts agree with the whole, and equal steps of azimuth,
 * doubled until they agree, which for a periodic smooth function converge exponentially.
 */
export function integrateVolume(f: VolumeFunction, { radiusKpc, heightKpc, edges }: Cylinder, tolerance: number): number {
  const r = breaks([...radii.map((share) => share * radiusKpc), ...edges.rKpc], 0, radiusKpc);
  const z = breaks([...heights.flatMap((share) => [share * heightKpc, -share * heightKpc]), ...edges.zKpc], -heightKpc, heightKpc);
  const measure = (bounds: Pick<Box, 'r' | 'z'>, depth: number, accuracy: number): Box => ({ ...bounds, depth, integral: boxIntegral(f, bounds, accuracy) });
  let open = r.slice(1).flatMap((to, i) => z.slice(1).map((top, j) => measure({ r: [r[i], to], z: [z[j], top] }, 0, 0)));
  let [done, pending] = [0, open.reduce((sum, box) => sum + box.integral, 0)];
  while (open.length > 0) {
    const limit = (tolerance * (done + pending)) / 8;
    const next: Box[] = [];
    for (const box of open) {
      const parts = quarters(box).map((bounds) => measure(bounds, box.depth + 1, limit));
      const sum = parts.reduce((whole, part) => whole + part.integral, 0);
      if (Math.abs(sum - box.integral) <= limit || box.depth >= deepest) done += sum;
      else next.push(...parts);
    }
    open = next;
    pending = open.reduce((sum, box) => sum + box.integral, 0);
  }
  return done;
}

function breaks(values: readonly number[], from: number, to: number): readonly number[] {
  return [...new Set(values.filter((value) => value >= from && value <= to))].sort((a, b) => a - b);
}

function quarters({ r, z }: Box): readonly Pick<Box, 'r' | 'z'>[] {
  const [middleR, middleZ] = [(r[0] + r[1]) / 2, (z[0] + z[1]) / 2];
  return ([[r[0], middleR], [middleR, r[1]]] as const).flatMap((radial) => ([[z[0], middleZ], [middleZ, z[1]]] as const).map((vertical) => ({ r: radial, z: vertical })));
}

/** One box: azimuths are doubled until the result changes by less than `accuracy`, or a thousandth of its own size. */
function boxIntegral(f: VolumeFunction, { r, z }: Pick<Box, 'r' | 'z'>, accuracy: number): number {
  let mean = azimuthMean(f, r, z, fewestAzimuths, 0);
  for (let count = fewestAzimuths; count < mostAzimuths; count *= 2) {
    const between = azimuthMean(f, r, z, count, Math.PI / count);
    const finer = (mean + between) / 2;
    const change = Math.abs(finer - mean);
    mean = finer;
    if (change <= accuracy || (accuracy === 0 && change <= 1e-3 * Math.abs(mean))) break;
  }
  return mean;
}

/** The integral over a box with `count` equal steps of azimuth from an offset on. */
function azimuthMean(f: VolumeFunction, [r0, r1]: readonly [number, number], [z0, z1]: readonly [number, number], count: number, offset: number): number {
  const points = n * n * count;
  const [x, y, z, values] = [0, 1, 2, 3].map(() => new Float64Array(points));
  const [halfR, halfZ] = [(r1 - r0) / 2, (z1 - z0) / 2];
  for (let k = 0, at = 0; k < count; k++) {
    const azimuth = offset + (2 * Math.PI * k) / count;
    const [c, s] = [Math.cos(azimuth), Math.sin(azimuth)];
    for (let i = 0; i < n; i++) {
      const radius = r0 + halfR * (1 + rule.nodes[i]);
      for (let j = 0; j < n; j++, at++) {
        x[at] = radius * c;
        y[at] = radius * s;
        z[at] = z0 + halfZ * (1 + rule.nodes[j]);
      }
    }
  }
  f(x, y, z, values);
  let sum = 0;
  for (let k = 0, at = 0; k < count; k++) {
    for (let i = 0; i < n; i++) {
      const weight = rule.weights[i] * (r0 + halfR * (1 + rule.nodes[i]));
      for (let j = 0; j < n; j++, at++) sum += weight * rule.weights[j] * values[at];
    }
  }
  return (sum * halfR * halfZ * 2 * Math.PI) / count;
}
