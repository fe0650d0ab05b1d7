import { depthAt, type DepthPlan } from './depth-spectrum.ts';

/** The highest peak of a Faraday spectrum. Angles rad, depths rad m^-2; NaN where nothing stands above the threshold. */
export interface DepthPeak {
  readonly depth: number;
  readonly depthError: number;
  /** Height of the peak, without its bias where there is noise. */
  readonly P: number;
  readonly PError: number;
  /** Angle of the electric vector at zero wavelength, in [0, pi). */
  readonly chi0: number;
  readonly chi0Error: number;
}

/** Below this many times the noise of the spectrum a peak is not believed, unless the caller says otherwise. */
export const defaultThreshold = 5;
/** P^2 of a peak is too high by this many sigma^2 (George, Stil & Keller 2012; printed there, a Monte Carlo gives 1.9 to 2.1). */
const peakBias = 2.3;

const noPeak: DepthPeak = { depth: NaN, depthError: NaN, P: NaN, PError: NaN, chi0: NaN, chi0Error: NaN };

/**
 * The highest peak of one spectrum, re and im at [start + index * stride], by a parabola through |F| at
 * its highest depth and the two beside it. Errors from the noise of the channels (Brentjens & de Bruyn
 * 2005, eq. 52 to 54, for any weights); 0 where none is stated.
 */
export function findDepthPeak(
  plan: DepthPlan,
  re: ArrayLike<number>,
  im: ArrayLike<number>,
  { threshold = defaultThreshold, start = 0, stride = 1 }: { threshold?: number; start?: number; stride?: number } = {},
): DepthPeak {
  const { count, noise } = plan;
  let best = -1;
  let largest = -1;
  for (let index = 0, at = start; index < count; index++, at += stride) {
    const square = re[at] * re[at] + im[at] * im[at];
    if (square > largest) [largest, best] = [square, index];
  }
  const height = Math.sqrt(largest);
  if (best < 0 || !(height > 0) || height < threshold * noise) return noPeak;
  const P = (index: number): number => Math.hypot(re[start + index * stride], im[start + index * stride]);
  let offset = 0;
  let top = height;
  if (best > 0 && best < count - 1) {
    const [left, right] = [P(best - 1), P(best + 1)];
    const curvature = left - 2 * height + right;
    offset = curvature < 0 ? (left - right) / (2 * curvature) : 0;
    top = height - ((left - right) * offset) / 4;
  }
  const depth = depthAt(plan, best + offset);
  // The angle varies little across the peak: it is interpolated between the two depths about it.
  const neighbour = Math.min(Math.max(best + (offset < 0 ? -1 : 1), 0), count - 1);
  const share = Math.abs(offset);
  const mix = (part: ArrayLike<number>): number => (1 - share) * part[start + best * stride] + share * part[start + neighbour * stride];
  const chi = Math.atan2(mix(im), mix(re)) / 2;
  const chi0 = chi - depth * plan.referenceLambda2;
  const depthError = plan.depthErrorTimesPeak / top;
  return {
    depth,
    depthError,
    P: Math.sqrt(Math.max(top * top - peakBias * noise * noise, 0)),
    PError: noise,
    chi0: chi0 - Math.PI * Math.floor(chi0 / Math.PI),
    chi0Error: Math.min(Math.hypot(noise / (2 * top), depthError * plan.referenceLambda2), Math.PI / Math.sqrt(12)),
  };
}

/**
 * The chance that noise alone stands above `threshold` times its rms somewhere among `samples`
 * independent depths: 1 - (1 - e^{-threshold^2/2})^samples (Rice 1945; George, Stil & Keller 2012).
 */
export function falsePeakChance(threshold: number, samples: number): number {
  return -Math.expm1(samples * Math.log1p(-Math.exp((-threshold * threshold) / 2)));
}

/** Moments of |F| over depth: sum |F| dphi, the mean depth, and the rms width about it. */
export interface FaradayMoments {
  readonly total: number;
  readonly mean: number;
  readonly width: number;
}

/**
 * Faraday moments of one spectrum where |F| is at least `lowest`; NaN where it is nowhere. `total` is in
 * the unit of F times rad m^-2. Source: Dickey et al. 2019 (from memory).
 */
export function faradayMoments(
  plan: DepthPlan,
  re: ArrayLike<number>,
  im: ArrayLike<number>,
  lowest: number,
  { start = 0, stride = 1 }: { start?: number; stride?: number } = {},
): FaradayMoments {
  let [sum, first, second] = [0, 0, 0];
  const middle = depthAt(plan, (plan.count - 1) / 2);
  for (let index = 0, at = start; index < plan.count; index++, at += stride) {
    const P = Math.hypot(re[at], im[at]);
    if (!(P >= lowest && P > 0)) continue;
    const depth = depthAt(plan, index) - middle;
    sum += P;
    first += P * depth;
    second += P * depth * depth;
  }
  if (sum === 0) return { total: NaN, mean: NaN, width: NaN };
  const mean = first / sum;
  return { total: sum * plan.step, mean: middle + mean, width: Math.sqrt(Math.max(second / sum - mean * mean, 0)) };
}
