import { randomStream } from '../math/random.ts';

/** What is known of a free parameter before the data, in the unit of its path. */
export type Prior =
  | { readonly kind: 'uniform'; readonly low: number; readonly high: number }
  | { readonly kind: 'logUniform'; readonly low: number; readonly high: number }
  | { readonly kind: 'normal'; readonly mean: number; readonly sigma: number }
  /** Density proportional to the sine: an inclination, rad, of directions that are all as likely. */
  | { readonly kind: 'isotropic'; readonly low: number; readonly high: number };

/** A parameter that a fit may change. */
export interface FreeParameter {
  readonly path: string;
  /** Unit of its values (angles rad), and the one in files and on screen. */
  readonly unit: string;
  readonly shownUnit: string;
  readonly prior: Prior;
  /** Values that the scene allows, inclusive. */
  readonly allowed: readonly [number, number];
  /** The scene's own value, where a first start is made. */
  readonly start: number;
  /** Set where it is no number of the scene but a factor on the model of this band of the data. */
  readonly calibrationBand?: number;
}

/**
 * The scale on which a fit works: 0 to 1 over a uniform range, the same in ln x for logUniform and in
 * cos x for isotropic, and standard deviations from the mean for normal.
 */
export function scaledFromValue({ prior }: FreeParameter, value: number): number {
  if (prior.kind === 'normal') return (value - prior.mean) / prior.sigma;
  const { low, high } = prior;
  if (prior.kind === 'uniform') return (value - low) / (high - low);
  if (prior.kind === 'isotropic') return (Math.cos(low) - Math.cos(value)) / (Math.cos(low) - Math.cos(high));
  return Math.log(value / low) / Math.log(high / low);
}

/** The reverse of `scaledFromValue`. */
export function valueFromScaled({ prior }: FreeParameter, scaled: number): number {
  if (prior.kind === 'normal') return prior.mean + scaled * prior.sigma;
  const { low, high } = prior;
  if (prior.kind === 'uniform') return low + scaled * (high - low);
  if (prior.kind === 'isotropic') return Math.acos(Math.min(1, Math.max(-1, Math.cos(low) - scaled * (Math.cos(low) - Math.cos(high)))));
  return low * (high / low) ** scaled;
}

/** d value/d scaled. */
export function slopeFromScaled(parameter: FreeParameter, scaled: number): number {
  const { prior } = parameter;
  if (prior.kind === 'normal') return prior.sigma;
  if (prior.kind === 'uniform') return prior.high - prior.low;
  if (prior.kind === 'isotropic') return (Math.cos(prior.low) - Math.cos(prior.high)) / Math.sin(valueFromScaled(parameter, scaled));
  return valueFromScaled(parameter, scaled) * Math.log(prior.high / prior.low);
}

/** The bounds of a parameter on its scale: the prior's range within what the scene allows. */
export function scaledBounds(parameter: FreeParameter): [number, number] {
  const { prior, allowed } = parameter;
  const meant = (value: number): boolean => {
    if (prior.kind === 'logUniform') return value > 0;
    return prior.kind !== 'isotropic' || (value >= 0 && value <= Math.PI);
  };
  const edge = (value: number, inside: number): number => (Number.isFinite(value) && meant(value) ? scaledFromValue(parameter, value) : inside);
  const lower = edge(allowed[0], -Infinity);
  const upper = edge(allowed[1], Infinity);
  return prior.kind === 'normal' ? [lower, upper] : [Math.max(0, lower), Math.min(1, upper)];
}

/** Residuals that a prior adds, on the scale of the fit: those of normal priors. */
export function priorResiduals(parameters: readonly FreeParameter[], scaled: Float64Array): Float64Array {
  return scaled.filter((_, j) => parameters[j].prior.kind === 'normal');
}

/**
 * `count` starts spread over the priors by a Latin hypercube (McKay et al. 1979), on the scale of
 * the fit; normal priors are spread over two standard deviations.
 */
export function spreadStarts(parameters: readonly FreeParameter[], count: number, seed: number): Float64Array[] {
  const starts = Array.from({ length: count }, () => new Float64Array(parameters.length));
  parameters.forEach((parameter, j) => {
    const random = randomStream(seed, `starts of ${parameter.path}`);
    const strata = Array.from({ length: count }, (_, k) => k);
    for (let k = count - 1; k > 0; k--) {
      const other = Math.floor(random.uniform() * (k + 1));
      [strata[k], strata[other]] = [strata[other], strata[k]];
    }
    const [lower, upper] = scaledBounds(parameter);
    const [from, to] = parameter.prior.kind === 'normal' ? [Math.max(-2, lower), Math.min(2, upper)] : [lower, upper];
    strata.forEach((stratum, k) => (starts[k][j] = from + ((stratum + random.uniform()) / count) * (to - from)));
  });
  return starts;
}
