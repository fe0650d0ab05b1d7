import { scenePath } from '../scene/paths.ts';
import type { ScenePath } from '../scene/paths.ts';
import type { Scene } from '../scene/types.ts';
import { InputError } from '../units/input-error.ts';
import { parseQuantity } from '../units/quantity.ts';
import type { FreeParameter, Prior } from './prior.ts';
import type { FreeText, PlacedText } from './study-types.ts';

/**
 * The free parameters of a hypothesis with their priors, in the units of their paths. Throws
 * InputError, placed in the study, for unknown paths, wrong units, empty or disallowed ranges.
 */
export function resolveFree(free: readonly FreeText[], scene: Scene): FreeParameter[] {
  return free.map((text) => {
    const target = placed(text.place, () => scenePath(scene, text.path));
    const { path, unit, shownUnit, whole } = target;
    if (whole) throw new InputError(`${path} takes whole numbers only; a fit needs a parameter that can change a little`, text.place);
    const [first, second] = text.values.map((part) => placed(part.place, () => parseQuantity(part.text, unit)));
    const prior = makePrior(text, first, second);
    if (prior.kind === 'isotropic') refuseNoAngle(text, unit, prior);
    placed(text.values[0].place, () => target.set(scene, first));
    if (text.kind !== 'normal') placed(text.values[1].place, () => target.set(scene, second));
    return { path, unit, shownUnit, prior, allowed: allowedRange(target, scene, prior), start: target.get() };
  });
}

/** The path's range; an end that is itself not allowed is moved inwards by a millionth of the prior's width. */
function allowedRange(target: ScenePath, scene: Scene, prior: Prior): [number, number] {
  const width = prior.kind === 'normal' ? prior.sigma : prior.high - prior.low;
  const inside = (end: number, step: number): number => {
    try {
      target.set(scene, end);
      return end;
    } catch (error) {
      if (error instanceof InputError) return end + step;
      throw error;
    }
  };
  return [inside(target.range[0], 1e-6 * width), inside(target.range[1], -1e-6 * width)];
}

/** An isotropic prior is one of inclinations, 0 to 180 deg. */
function refuseNoAngle({ path, values }: FreeText, unit: string, { low, high }: { low: number; high: number }): void {
  if (unit !== 'rad') throw new InputError(`${path} is no angle; isotropic priors are for angles such as galaxy.inclination`, values[0].place);
  if (low < 0 || high > Math.PI * (1 + 1e-12)) {
    throw new InputError(`${path}: isotropic from ${values[0].text} to ${values[1].text}; allowed: 0 to 180 deg`, values[0].place);
  }
}

/** A prior of values in the unit of its path. Throws InputError where it is empty. */
export function makePrior({ path, kind, values }: FreeText, first: number, second: number): Prior {
  const refuse = (part: PlacedText, reason: string): never => {
    throw new InputError(`${path}: ${reason}`, part.place);
  };
  if (kind === 'normal') {
    if (!(second > 0)) refuse(values[1], `a sigma of ${values[1].text} is given; allowed: above 0`);
    return { kind, mean: first, sigma: second };
  }
  if (!(first < second)) refuse(values[0], `the range from ${values[0].text} to ${values[1].text} is empty; the lower end comes first`);
  if (kind === 'logUniform' && !(first > 0)) refuse(values[0], `logUniform from ${values[0].text}; allowed: above 0`);
  return { kind, low: first, high: second };
}

function placed<T>(place: PlacedText['place'], compute: () => T): T {
  try {
    return compute();
  } catch (error) {
    throw error instanceof InputError ? error.at(place) : error;
  }
}
