import { multiplyLower } from '../math/cholesky.ts';
import type { RandomStream } from '../math/random.ts';
import { isInCube, randomDirection } from './ellipsoids.ts';
import type { Ellipsoid } from './ellipsoids.ts';

export interface SliceWalk {
  readonly point: Float64Array;
  readonly logLikelihood: number;
  readonly evaluations: number;
}

/** A slice is not stepped out further than this many widths to either side. */
const mostSteps = 20;

/**
 * Walks from a live point to a new one, uniform in the part of the unit cube where the likelihood is
 * above `threshold`, by slices (Neal 2003, stepping out and shrinking) in random directions on the
 * scale of the ellipsoid around the point, so that narrow and curved ridges are followed.
 */
export async function sliceWalk(
  start: ArrayLike<number>, threshold: number, scale: Ellipsoid, slices: number, random: RandomStream,
  likelihood: (point: Float64Array) => Promise<number>,
): Promise<SliceWalk> {
  let point: Float64Array = Float64Array.from(start);
  let logLikelihood = NaN;
  let evaluations = 0;
  const at = async (candidate: Float64Array): Promise<number> => {
    if (!isInCube(candidate)) return -Infinity;
    evaluations++;
    return likelihood(candidate);
  };
  for (let slice = 0; slice < slices; slice++) {
    const direction = multiplyLower(scale.lower, randomDirection(point.length, random));
    const along = (distance: number): Float64Array => point.map((value, j) => value + distance * direction[j]);
    // Step out from an interval of one radius around the point.
    let low = -random.uniform();
    let high = low + 1;
    for (let k = 0; k < mostSteps && (await at(along(low))) > threshold; k++) low -= 1;
    for (let k = 0; k < mostSteps && (await at(along(high))) > threshold; k++) high += 1;
    // Shrink towards the point until one is inside.
    for (;;) {
      const distance = low + random.uniform() * (high - low);
      const candidate = along(distance);
      const there = await at(candidate);
      if (there > threshold) {
        point = candidate;
        logLikelihood = there;
        break;
      }
      if (distance < 0) low = distance;
      else high = distance;
      // Beyond rounding there is no other point on this slice.
      if (high - low < 1e-14) break;
    }
  }
  if (Number.isNaN(logLikelihood)) logLikelihood = await likelihood(point);
  return { point, logLikelihood, evaluations };
}
