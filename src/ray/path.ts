import type { IntegrandInputs } from './integrand.ts';

/** A galaxy as a ray sees it: the volume it crosses and how it is turned. */
export interface RayGeometry {
  readonly sinI: number;
  readonly cosI: number;
  readonly radiusKpc: number;
  readonly heightKpc: number;
  readonly edges: IntegrandInputs['edges'];
}

/**
 * Fills `breaks` with the rising values of s (kpc, growing towards the observer) between which
 * the integrand along the ray at (major, minor) is smooth: the ends of the volume, the plane, the
 * closest approach to the axis, declared edges, and levels graded towards the plane. Returns how
 * many there are, 0 where the ray misses the volume.
 */
export function findBreaks(geometry: RayGeometry, majorKpc: number, minorKpc: number, breaks: Float64Array): number {
  const { sinI, cosI, radiusKpc, heightKpc, edges } = geometry;
  const span = volumeSpan(geometry, majorKpc, minorKpc);
  if (!span) return 0;
  const [from, to] = span;
  let count = 0;
  const add = (s: number): void => {
    if (s > from && s < to && count < breaks.length - 2) breaks[count++] = s;
  };
  const atHeight = (z: number): void => {
    if (cosI !== 0) add((z - minorKpc * sinI) / cosI);
  };
  const atDepth = (y: number): void => {
    if (sinI !== 0) add((minorKpc * cosI - y) / sinI);
  };
  atHeight(0);
  atDepth(0);
  for (const z of edges.zKpc) atHeight(z);
  for (const r of edges.rKpc) {
    const square = r * r - majorKpc * majorKpc;
    if (square <= 0) continue;
    atDepth(Math.sqrt(square));
    atDepth(-Math.sqrt(square));
  }
  for (const share of gradedShares) {
    atHeight(share * heightKpc);
    atHeight(-share * heightKpc);
    // Near edge-on rays run through the disc lengthwise: grade towards the axis too.
    if (Math.abs(cosI) < 0.3) {
      atDepth(share * radiusKpc);
      atDepth(-share * radiusKpc);
    }
  }
  breaks[count++] = from;
  breaks[count++] = to;
  const sorted = breaks.subarray(0, count).sort();
  return dropCoincident(sorted, (to - from) * 1e-12);
}

/** Heights, as shares of the volume's, at which first panels end. */
const gradedShares = [0.1, 0.4];

/** Where a ray enters and leaves the volume, far end first; undefined where it misses. */
function volumeSpan({ sinI, cosI, radiusKpc, heightKpc }: RayGeometry, majorKpc: number, minorKpc: number): [number, number] | undefined {
  const square = radiusKpc * radiusKpc - majorKpc * majorKpc;
  if (square <= 0) return undefined;
  let from = -Infinity;
  let to = Infinity;
  if (sinI === 0) {
    if (minorKpc * minorKpc >= square) return undefined;
  } else {
    const half = Math.sqrt(square) / Math.abs(sinI);
    const middle = (minorKpc * cosI) / sinI;
    [from, to] = [middle - half, middle + half];
  }
  if (cosI === 0) {
    if (Math.abs(minorKpc * sinI) > heightKpc) return undefined;
  } else {
    const half = heightKpc / Math.abs(cosI);
    const middle = (-minorKpc * sinI) / cosI;
    from = Math.max(from, middle - half);
    to = Math.min(to, middle + half);
  }
  return to > from ? [from, to] : undefined;
}

function dropCoincident(sorted: Float64Array, least: number): number {
  let kept = 1;
  for (let k = 1; k < sorted.length; k++) {
    if (sorted[k] - sorted[kept - 1] > least) sorted[kept++] = sorted[k];
    else if (k === sorted.length - 1) sorted[kept - 1] = sorted[k];
  }
  return kept;
}
