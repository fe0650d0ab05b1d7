import type { SpectralPoint } from '../ray/integrand.ts';
import { walkOrigins, type OriginPieces } from '../ray/origin.ts';
import type { RayBundle } from '../ray/types.ts';
import type { Scene } from '../scene/types.ts';

/** Which layer is seen at one frequency: of one ray, or of a region (physics.md section 5, own definition). */
export interface OriginLayer {
  /** Points of the cumulative net share in z, negative shares left out, kpc: 16, 50 and 84 %. */
  readonly lowKpc: number;
  readonly medianKpc: number;
  readonly highKpc: number;
  /** Integral of z w over that of w, kpc: with the negative shares, so that it may lie outside the layer. */
  readonly meanKpc: number;
  /** Part of the positive shares from the half of the volume before the plane z = 0, and from behind it; NaN edge-on. */
  readonly nearShare: number;
  readonly farShare: number;
  /** Part of all shares, by size, that others cancel. */
  readonly cancelledShare: number;
  /** Mean Faraday depth of the light seen, weighted as the mean height; and through the whole galaxy, averaged over rays; rad m^-2. */
  readonly seenDepth: number;
  readonly wholeDepth: number;
  /** Rays that count: those whose |P| is at least 1 % of what they emit. */
  readonly rays: number;
}

/** A ray counts whose |P| is at least this part of what it emits. */
export const smallestVisible = 1e-2;
const bins = 2000;

/** Sums from which a layer follows; positive shares by height. */
interface LayerSums {
  readonly positive: Float64Array;
  sum: number;
  heightSum: number;
  depthSum: number;
  wholeDepthSum: number;
  negative: number;
  near: number;
  rays: number;
}

/** The sign of z before the plane of the disc, as seen from here; NaN edge-on, where a ray lies all on one side. */
export function nearSide(inclination: number): number {
  const cos = Math.cos(inclination);
  return Math.abs(cos) < 1e-9 ? NaN : Math.sign(cos);
}

/**
 * Gathers the layers seen in regions at each of several frequencies, layers()[region][frequency], from
 * the pieces of rays (`walkOrigins`): net shares of all rays of a region added, each along its own final
 * angle. `heightKpc` is that of the scene's volume. NaN where no ray counts.
 */
export function makeOriginProfiles(
  { inclination, volume: { heightKpc } }: Scene['galaxy'],
  count: number,
  frequencies: number,
): { readonly take: (region: number, pieces: OriginPieces) => void; readonly layers: () => OriginLayer[][] } {
  const near = nearSide(inclination);
  const noSums = (): LayerSums => ({ positive: new Float64Array(bins), sum: 0, heightSum: 0, depthSum: 0, wholeDepthSum: 0, negative: 0, near: 0, rays: 0 });
  const sums = Array.from({ length: count }, () => Array.from({ length: frequencies }, noSums));
  return {
    take: (region, pieces) => sums[region].forEach((layer, f) => addRay(layer, pieces, f, heightKpc, near)),
    layers: () => sums.map((layers) => layers.map((layer) => layerOf(layer, heightKpc))),
  };
}

/** The layers seen in regions of a sky; `regionOf` holds each ray's region, 0 to count - 1, or -1. No beam. */
export function originProfiles(scene: Scene, bundle: RayBundle, spectrum: readonly SpectralPoint[], regionOf: ArrayLike<number>, count: number): OriginLayer[][] {
  const { take, layers } = makeOriginProfiles(scene.galaxy, count, spectrum.length);
  const wanted = Array.from({ length: bundle.northKpc.length }, (_, ray) => ray).filter((ray) => regionOf[ray] >= 0);
  walkOrigins(scene, { northKpc: Float64Array.from(wanted, (ray) => bundle.northKpc[ray]), eastKpc: Float64Array.from(wanted, (ray) => bundle.eastKpc[ray]) }, spectrum, (ray, pieces) => take(regionOf[wanted[ray]], pieces));
  return layers();
}

function addRay(layer: LayerSums, { count, z, depth, wholeDepth, shares, emitted }: OriginPieces, frequency: number, heightKpc: number, near: number): void {
  const w = shares[frequency];
  let P = 0;
  for (let k = 0; k < count; k++) P += w[k];
  if (!(P > 0) || P < smallestVisible * emitted[frequency]) return;
  for (let k = 0; k < count; k++) {
    layer.sum += w[k];
    layer.heightSum += w[k] * z[k];
    layer.depthSum += w[k] * depth[k];
    if (w[k] < 0) layer.negative -= w[k];
    else {
      const bin = Math.floor(((z[k] + heightKpc) / (2 * heightKpc)) * bins);
      layer.positive[Math.min(Math.max(bin, 0), bins - 1)] += w[k];
      if (Number.isNaN(near) || near * z[k] > 0) layer.near += Number.isNaN(near) ? NaN : w[k];
    }
  }
  layer.wholeDepthSum += wholeDepth;
  layer.rays++;
}

function layerOf({ positive, sum, heightSum, depthSum, wholeDepthSum, negative, near, rays }: LayerSums, heightKpc: number): OriginLayer {
  const total = positive.reduce((all, value) => all + value, 0);
  if (rays === 0 || total === 0) return { lowKpc: NaN, medianKpc: NaN, highKpc: NaN, meanKpc: NaN, nearShare: NaN, farShare: NaN, cancelledShare: NaN, seenDepth: NaN, wholeDepth: NaN, rays };
  const at = (share: number): number => {
    let below = 0;
    for (let bin = 0; bin < bins; bin++) {
      if (below + positive[bin] >= share * total) {
        const inside = positive[bin] > 0 ? (share * total - below) / positive[bin] : 0;
        return heightKpc * ((2 * (bin + inside)) / bins - 1);
      }
      below += positive[bin];
    }
    return heightKpc;
  };
  return {
    lowKpc: at(0.16),
    medianKpc: at(0.5),
    highKpc: at(0.84),
    meanKpc: heightSum / sum,
    nearShare: near / total,
    farShare: 1 - near / total,
    cancelledShare: negative / (negative + total),
    seenDepth: depthSum / sum,
    wholeDepth: wholeDepthSum / rays,
    rays,
  };
}
