import { besselRatio, logBesselI0 } from '../math/bessel.ts';

/**
 * A value that a likelihood other than the Gaussian judges, in a form that least squares and
 * samplers take alike: ln L = best - residual^2/2, `best` being the largest ln L that any model
 * could reach (signed deviance residuals, McCullagh & Nelder 1989, section 2.4).
 */
export interface Deviance {
  readonly best: number;
  readonly residual: (model: number) => number;
}

/** A measured value with Gaussian noise. */
export function gaussianDeviance(value: number, sigma: number): Deviance {
  return { best: -Math.log(sigma) - Math.log(2 * Math.PI) / 2, residual: (model) => (value - model) / sigma };
}

/** Half turns further off than this add nothing that doubles see. */
const halfTurns = 6;

/**
 * An angle of polarization, rad: a Gaussian wrapped onto half a turn, since chi and chi + 180 deg are
 * one orientation.
 */
export function wrappedDeviance(value: number, sigma: number): Deviance {
  const best = logWrapped(0, sigma);
  return {
    best,
    residual: (model) => {
      const off = value - model;
      const nearest = off - Math.PI * Math.round(off / Math.PI);
      return Math.sign(nearest) * Math.sqrt(Math.max(0, 2 * (best - logWrapped(nearest, sigma))));
    },
  };
}

function logWrapped(off: number, sigma: number): number {
  let sum = 0;
  for (let k = -halfTurns; k <= halfTurns; k++) {
    const square = (off + k * Math.PI) ** 2 - off * off;
    sum += Math.exp(-square / (2 * sigma * sigma));
  }
  return Math.log(sum) - (off * off) / (2 * sigma * sigma) - Math.log(sigma) - Math.log(2 * Math.PI) / 2;
}

/**
 * A polarized intensity whose Q and U have Gaussian noise of rms sigma each: the distribution of
 * Rice (1945), so that the bias of P needs no correction and must not have had one.
 */
export function riceDeviance(value: number, sigma: number): Deviance {
  const likeliest = likeliestP(value, sigma);
  const best = logRice(value, likeliest, sigma);
  return { best, residual: (model) => Math.sign(likeliest - model) * Math.sqrt(Math.max(0, 2 * (best - logRice(value, model, sigma)))) };
}

/** ln of the Rice density of a measured P, value > 0. */
export function logRice(value: number, model: number, sigma: number): number {
  const variance = sigma * sigma;
  // exp(-(P - m)^2/2) times e^-x I0(x), so that large signals do not overflow.
  const x = (value * model) / variance;
  return Math.log(value / variance) - (value - model) ** 2 / (2 * variance) + logBesselI0(x) - x;
}

/** The true P that a measured one is likeliest from: 0 below sqrt(2) sigma, else where m = P I1/I0(P m/sigma^2). */
function likeliestP(value: number, sigma: number): number {
  if (value <= Math.SQRT2 * sigma) return 0;
  const variance = sigma * sigma;
  let [low, high] = [0, value];
  for (let step = 0; step < 60; step++) {
    const middle = (low + high) / 2;
    if (value * besselRatio((value * middle) / variance) > middle) low = middle;
    else high = middle;
  }
  return (low + high) / 2;
}
