import type { OriginPieces } from '../ray/origin.ts';
import { nearSide, smallestVisible } from './origin-profile.ts';

/** Maps of the layer seen, [frequency * rays + ray]; NaN where |P| is below 1 % of what the ray emits. */
export interface OriginMaps {
  /** Points of the cumulative net share in z along the ray, negative shares left out, kpc: 16, 50 and 84 %. */
  readonly lowKpc: Float64Array;
  readonly medianKpc: Float64Array;
  readonly highKpc: Float64Array;
  /** Part of the positive shares from before the plane of the disc; NaN edge-on. */
  readonly nearShare: Float64Array;
  /** Part of all shares, by size, that others cancel. */
  readonly cancelledShare: Float64Array;
}

/** Fills such maps from the pieces of rays (`walkOrigins`), for a galaxy of this inclination (rad). */
export function makeOriginMaps(inclination: number, rays: number, frequencies: number): { readonly maps: OriginMaps; readonly take: (ray: number, pieces: OriginPieces) => void } {
  const plane = (): Float64Array => new Float64Array(rays * frequencies).fill(NaN);
  const maps: OriginMaps = { lowKpc: plane(), medianKpc: plane(), highKpc: plane(), nearShare: plane(), cancelledShare: plane() };
  const side = nearSide(inclination);
  const take = (ray: number, { count, z, shares, emitted }: OriginPieces): void => {
    shares.forEach((w, f) => {
      let [positive, negative, near] = [0, 0, 0];
      for (let k = 0; k < count; k++) {
        if (w[k] < 0) negative -= w[k];
        else {
          positive += w[k];
          if (side * z[k] > 0) near += w[k];
        }
      }
      const P = positive - negative;
      if (!(P > 0) || P < smallestVisible * emitted[f]) return;
      const at = f * rays + ray;
      const [a, b, c] = heightsAt(z, w, count, positive);
      maps.lowKpc[at] = Math.min(a, c);
      maps.medianKpc[at] = b;
      maps.highKpc[at] = Math.max(a, c);
      maps.nearShare[at] = Number.isNaN(side) ? NaN : near / positive;
      maps.cancelledShare[at] = negative / (positive + negative);
    });
  };
  return { maps, take };
}

/**
 * Heights at 16, 50 and 84 % of the positive shares, in the order of the ray: pieces lie in that order,
 * half of each before its place, and between two places the share grows evenly.
 */
function heightsAt(z: Float64Array, w: Float64Array, count: number, positive: number): readonly number[] {
  const wanted = [0.16, 0.5, 0.84].map((share) => share * positive);
  const found: number[] = [];
  let [reached, last] = [0, -1];
  for (let k = 0; k < count && found.length < wanted.length; k++) {
    if (!(w[k] > 0)) continue;
    const next = last < 0 ? w[k] / 2 : reached + (w[last] + w[k]) / 2;
    while (found.length < wanted.length && next >= wanted[found.length]) {
      const part = last < 0 ? 1 : (wanted[found.length] - reached) / (next - reached);
      found.push(last < 0 ? z[k] : z[last] + part * (z[k] - z[last]));
    }
    [reached, last] = [next, k];
  }
  while (found.length < wanted.length) found.push(last < 0 ? NaN : z[last]);
  return found;
}
