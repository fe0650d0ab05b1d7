import type { IntegrandInputs } from './integrand.ts';

/** A galaxy as a ray sees it: the volume it crosses and how it is turned. */
export interface RayGeometry {
  readonly sinI: number;
  readonly cosI: number;
  readonly radiusKpc: number;
  readonly heightKpc: number;
  readonly edges: IntegrandInputs['edges'];
  /** Length of a panel at most, so that no structure of a gridded field is stepped over. */
  readonly longestPanelKpc: number;
}

/** Most breaks of one ray. */
export const mostBreaks = 128;
/** Breaks closer than this share of the path are one. */
export const coincidence = 1e-12;
/** Heights, as shares of the volume's, at which first panels end. */
export const gradedShares = [0.25] as const;
/** Rays that pass the axis closer than this share of the volume's radius break where they are closest to it. */
export const closeToAxis = 0.15;
/**
 * Rays that pass the axis closer than this share of the volume's radius see fields turn within
 * about their distance from it, too fast for a long panel to notice: they break at so many distances.
 */
export const nearAxis = 0.03;
export const axisBreaks = [3, 12] as const;
/** Rays that run through the disc lengthwise, |cos i| below this, are graded towards the axis too. */
export const steepestGraded = 0.3;

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
  const least = (to - from) * coincidence;
  breaks[0] = from;
  breaks[1] = to;
  let count = 2;
  const insert = (s: number): void => {
    if (!(s > from && s < to) || count >= mostBreaks) return;
    let at = count - 1;
    while (breaks[at - 1] > s) at--;
    if (s - breaks[at - 1] <= least || breaks[at] - s <= least) return;
    for (let k = count; k > at; k--) breaks[k] = breaks[k - 1];
    breaks[at] = s;
    count++;
  };
  const atHeight = (z: number): void => {
    if (cosI !== 0) insert((z - minorKpc * sinI) / cosI);
  };
  const atDepth = (y: number): void => {
    if (sinI !== 0) insert((minorKpc * cosI - y) / sinI);
  };
  atHeight(0);
  const distance = Math.abs(majorKpc);
  if (distance < closeToAxis * radiusKpc) atDepth(0);
  for (const z of edges.zKpc) atHeight(z);
  for (const r of edges.rKpc) {
    const square = r * r - majorKpc * majorKpc;
    if (square <= 0) continue;
    atDepth(Math.sqrt(square));
    atDepth(-Math.sqrt(square));
  }
  if (distance < nearAxis * radiusKpc) {
    for (const times of axisBreaks) {
      atDepth(times * distance);
      atDepth(-times * distance);
    }
  }
  for (const share of gradedShares) {
    atHeight(share * heightKpc);
    atHeight(-share * heightKpc);
    if (Math.abs(cosI) >= steepestGraded) continue;
    atDepth(share * radiusKpc);
    atDepth(-share * radiusKpc);
  }
  return count;
}

/** Where a ray enters and leaves the volume, far end first; undefined where it misses. */
function volumeSpan({ sinI, cosI, radiusKpc, heightKpc }: RayGeometry, majorKpc: number, minorKpc: number): [number, number] | undefined {
  const square = radiusKpc * radiusKpc - majorKpc * majorKpc;
  if (square <= 0) return undefined;
  let from = -Infinity;
  let to = Infinity;
  if (sinI === 0) {
    if (minorKpc * minorKpc > square) return undefined;
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
