import { InputError } from '../units/input-error.ts';
import type { Channel } from './types.ts';
import { channelLambda2M2, lambda2M2 } from './wavelength.ts';

/** How the channels of a Faraday spectrum are weighted. */
export type DepthWeighting = 'equal' | 'noise';

export interface DepthOptions {
  /** `noise`: 1/rms^2, the least error of P, though a quiet band then decides the resolution alone; default `equal`. */
  readonly weighting?: DepthWeighting;
  /** P is divided by (nu/mean nu)^-alpha, so that the spectrum of the emission does not look like depth; default 0. */
  readonly spectralIndex?: number;
  /** Depths, rad m^-2; default from -`largestDepth` to it, as far as 2001 of them reach, 1/8 of the resolution apart. */
  readonly firstDepth?: number;
  readonly lastDepth?: number;
  readonly step?: number;
}

/** What a set of channels can tell of Faraday depth, and the depths at which a spectrum is taken. */
export interface DepthPlan {
  readonly lambda2M2: Float64Array;
  /** Weights, sum 1, and what each channel's P is multiplied by: weight over spectrum. */
  readonly weights: Float64Array;
  readonly factors: Float64Array;
  /** Weighted mean of lambda^2: the angles of the spectrum hold there (Brentjens & de Bruyn 2005, eq. 32). */
  readonly referenceLambda2: number;
  readonly firstDepth: number;
  readonly step: number;
  readonly count: number;
  /** Full width of the spread function at half its height, found numerically, rad m^-2. */
  readonly resolution: number;
  /** Depth at which the widest channel loses half: 1.895/(its width in lambda^2) (there sqrt 3, eq. 63). */
  readonly largestDepth: number;
  /** Widest structure in depth that is still seen: pi/(smallest lambda^2) (eq. 62). */
  readonly largestScale: number;
  /** rms of the real and of the imaginary part of the spectrum; 0 where no noise is stated. */
  readonly noise: number;
  /** Error of a peak's depth, times its height: see `peakError`. */
  readonly depthErrorTimesPeak: number;
}

const stepsPerResolution = 8;
const mostDepths = 2001;
/** However wide the channels, the spectrum shows its spread function whole. */
const leastResolutions = 4;
/** sinc(x) = 1/2 at this x. */
const halfSinc = 1.8954942670339809;
/** Channels that state no width are as wide as their spacing. */
const sameShare = 1e-9;

/**
 * Plans the Faraday spectrum of channels whose rms noise is `noise` (0: none stated). Throws
 * InputError for fewer than two wavelengths, a channel without noise among noisy ones where weights
 * need it, and depths that do not rise.
 * Source: Brentjens & de Bruyn 2005, sections 3 and 4.
 */
export function planDepths(channels: readonly Channel[], noise: ArrayLike<number>, options: DepthOptions = {}): DepthPlan {
  const lambda2 = Float64Array.from(channels, channelLambda2M2);
  const sorted = lambda2.slice().sort();
  const span = sorted[sorted.length - 1] - sorted[0];
  if (!(span > sameShare * sorted[0])) throw new InputError('a Faraday spectrum needs at least two wavelengths; the maps have one');
  const weights = channelWeights(channels, noise, options.weighting);
  const referenceLambda2 = weights.reduce((sum, weight, k) => sum + weight * lambda2[k], 0);
  const factors = spectrumFactors(channels, weights, options.spectralIndex ?? 0);
  const resolution = spreadWidth(lambda2, weights, referenceLambda2, span);
  const largestDepth = halfSinc / widestChannel(channels, sorted);
  const step = options.step ?? resolution / stepsPerResolution;
  const reach = Math.min(Math.max(largestDepth, leastResolutions * resolution), (step * (mostDepths - 1)) / 2);
  const firstDepth = options.firstDepth ?? -step * Math.floor(reach / step);
  const lastDepth = options.lastDepth ?? step * Math.floor(reach / step);
  if (!(step > 0 && lastDepth > firstDepth && Number.isFinite(lastDepth - firstDepth))) {
    throw new InputError(`depths from ${firstDepth} to ${lastDepth} rad/m^2 in steps of ${step}; give a range that rises and a step above 0`);
  }
  const count = Math.floor((lastDepth - firstDepth) / step + 1e-6) + 1;
  if (count < 3 || count > 1e5) throw new InputError(`${count} depths from ${firstDepth} to ${lastDepth} rad/m^2 in steps of ${step}; allowed: 3 to 100000`);
  return {
    lambda2M2: lambda2,
    weights,
    factors,
    referenceLambda2,
    firstDepth,
    step,
    count,
    resolution,
    largestDepth,
    largestScale: Math.PI / sorted[0],
    ...spectrumErrors(lambda2, weights, factors, referenceLambda2, noise),
  };
}

/** The depth of an index of the spectrum, which need not be whole. */
export function depthAt({ firstDepth, step }: DepthPlan, index: number): number {
  return firstDepth + step * index;
}

/** All depths of a plan. */
export function depthsOf(plan: DepthPlan): Float64Array {
  return Float64Array.from({ length: plan.count }, (_, index) => depthAt(plan, index));
}

/** The spread function R(phi) = sum w e^{-2 i phi (lambda^2 - lambda0^2)} (Brentjens & de Bruyn 2005, eq. 24). */
export function spreadFunction(plan: Pick<DepthPlan, 'lambda2M2' | 'weights' | 'referenceLambda2'>, depth: number): [re: number, im: number] {
  let [re, im] = [0, 0];
  plan.lambda2M2.forEach((square, k) => {
    const angle = -2 * depth * (square - plan.referenceLambda2);
    re += plan.weights[k] * Math.cos(angle);
    im += plan.weights[k] * Math.sin(angle);
  });
  return [re, im];
}

function channelWeights(channels: readonly Channel[], noise: ArrayLike<number>, weighting: DepthWeighting | undefined): Float64Array {
  const isNoisy = channels.every((_, k) => noise[k] > 0);
  if (weighting === 'noise' && !isNoisy) throw new InputError('weights by noise need the noise of every channel; state it, or weight channels equally');
  const raw = Float64Array.from(channels, (_, k) => (weighting === 'noise' ? noise[k] ** -2 : 1));
  const total = raw.reduce((sum, weight) => sum + weight, 0);
  return raw.map((weight) => weight / total);
}

function spectrumFactors(channels: readonly Channel[], weights: Float64Array, index: number): Float64Array {
  const middle = Math.exp(channels.reduce((sum, { frequencyHz }) => sum + Math.log(frequencyHz), 0) / channels.length);
  return weights.map((weight, k) => weight * (channels[k].frequencyHz / middle) ** index);
}

/** Width in lambda^2 of the widest channel; of the closest pair of wavelengths where channels are monochromatic. */
function widestChannel(channels: readonly Channel[], sorted: Float64Array): number {
  const widest = channels.reduce(
    (most, { frequencyHz, widthHz }) => Math.max(most, lambda2M2(frequencyHz - widthHz / 2) - lambda2M2(frequencyHz + widthHz / 2)),
    0,
  );
  if (widest > 0) return widest;
  let closest = Infinity;
  for (let k = 1; k < sorted.length; k++) if (sorted[k] - sorted[k - 1] > sameShare * sorted[k]) closest = Math.min(closest, sorted[k] - sorted[k - 1]);
  return closest;
}

/** Full width at half maximum of |R|: out to where it first falls below 1/2, then by halving. */
function spreadWidth(lambda2: Float64Array, weights: Float64Array, referenceLambda2: number, span: number): number {
  const height = (depth: number): number => Math.hypot(...spreadFunction({ lambda2M2: lambda2, weights, referenceLambda2 }, depth));
  const step = 0.05 / span;
  let [low, high] = [0, step];
  // Two wavelengths of unequal weight may never fall below 1/2: then the spectrum cannot tell depths apart.
  while (height(high) > 0.5 && high < 1000 * step) [low, high] = [high, high + step];
  if (height(high) > 0.5) return Math.PI / span;
  for (let round = 0; round < 60; round++) {
    const middle = (low + high) / 2;
    if (height(middle) > 0.5) low = middle;
    else high = middle;
  }
  return low + high;
}

/** Errors propagated from the noise of Q and of U: of the spectrum, and of the depth where it peaks. */
function spectrumErrors(
  lambda2: Float64Array,
  weights: Float64Array,
  factors: Float64Array,
  referenceLambda2: number,
  noise: ArrayLike<number>,
): Pick<DepthPlan, 'noise' | 'depthErrorTimesPeak'> {
  let [square, lever, spread] = [0, 0, 0];
  lambda2.forEach((value, k) => {
    const offset = value - referenceLambda2;
    square += (factors[k] * noise[k]) ** 2;
    lever += (factors[k] * noise[k] * offset) ** 2;
    spread += weights[k] * offset * offset;
  });
  return { noise: Math.sqrt(square), depthErrorTimesPeak: Math.sqrt(lever) / (2 * spread) };
}
