import { normalQuantile, normalShare } from '../math/normal-quantile.ts';
import { scaledBounds, valueFromScaled } from './prior.ts';
import type { FreeParameter } from './prior.ts';

/**
 * Values in the units of the parameters from a point of the unit cube, so that a uniform point has
 * the prior's density; normal priors are cut at what the scene allows.
 */
export function valuesFromCube(parameters: readonly FreeParameter[], cube: ArrayLike<number>): Float64Array {
  return Float64Array.from(parameters, (parameter, j) => {
    const [lower, upper] = scaledBounds(parameter);
    if (parameter.prior.kind !== 'normal') return valueFromScaled(parameter, lower + cube[j] * (upper - lower));
    const [below, above] = [normalShare(lower), normalShare(upper)];
    const scaled = normalQuantile(below + cube[j] * (above - below));
    return valueFromScaled(parameter, Math.min(upper, Math.max(lower, scaled)));
  });
}

/** ln of the prior on the scale of a fit, up to a constant; -Infinity outside. */
export function logPriorScaled(parameters: readonly FreeParameter[], scaled: ArrayLike<number>): number {
  let sum = 0;
  for (let j = 0; j < parameters.length; j++) {
    const [lower, upper] = scaledBounds(parameters[j]);
    if (!(scaled[j] >= lower && scaled[j] <= upper)) return -Infinity;
    if (parameters[j].prior.kind === 'normal') sum -= scaled[j] ** 2 / 2;
  }
  return sum;
}
