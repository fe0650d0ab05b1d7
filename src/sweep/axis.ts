import { scenePath } from '../scene/paths.ts';
import type { Scene } from '../scene/types.ts';
import { InputError, type Place } from '../units/input-error.ts';
import { parseQuantity } from '../units/quantity.ts';
import type { DesignName, PlacedText, Spacing, SweepAxis, VaryText } from './types.ts';

/**
 * A varied number resolved against every scene it is varied in. Throws InputError, placed in the sweep,
 * for an unknown path, wrong units, a value that is not allowed, an empty range, a spacing that does
 * not suit the quantity.
 */
export function resolveAxis({ path, place, list, range }: VaryText, scenes: readonly Scene[], design: DesignName): SweepAxis {
  const targets = placed(place, () => scenes.map((scene) => scenePath(scene, path)));
  const [{ unit, shownUnit, whole, meaning }] = targets;
  const read = ({ text, place: at }: PlacedText): number => placed(at, () => parseQuantity(text, unit));
  const check = (value: number, at: Place): void => placed(at, () => targets.forEach((target, k) => void target.set(scenes[k], value)));
  const about = { path, unit, shownUnit, meaning };
  if (list) {
    const values = list.map(read);
    values.forEach((value, k) => {
      if (values.indexOf(value) < k) throw new InputError(`${path}: ${list[k].text} is listed twice`, list[k].place);
      check(value, list[k].place);
    });
    return { ...about, values, spacing: 'list' };
  }
  if (!range) throw new Error('a varied quantity has neither list nor range');
  const [from, to] = [read(range.from), read(range.to)];
  if (!(from < to)) throw new InputError(`${path}: the range from ${range.from.text} to ${range.to.text} is empty; the lower end comes first`, range.from.place);
  if (whole) throw new InputError(`${path} takes whole numbers only: list its values`, place);
  check(from, range.from.place);
  check(to, range.to.place);
  if (range.spacing === 'log' && !(from > 0)) throw new InputError(`${path}: spacing log from ${range.from.text}; allowed: above 0`, range.from.place);
  if (range.spacing === 'cos' && !(unit === 'rad' && from >= 0 && to <= Math.PI * (1 + 1e-12))) {
    throw new InputError(`${path}: spacing cos is for angles between 0 and 180 deg, such as galaxy.inclination`, place);
  }
  const { steps = 2, spacing } = range;
  const values = design === 'grid' ? Array.from({ length: steps }, (_, k) => between(from, to, spacing, k / (steps - 1))) : [from, to];
  values.forEach((value) => check(value, place));
  return { ...about, values, spacing };
}

/** The value a share of the way from one end to the other: equal steps of x, log x or cos x. The ends are exact. */
export function between(from: number, to: number, spacing: Spacing, share: number): number {
  if (share === 0 || share === 1) return share === 0 ? from : to;
  if (spacing === 'log') return from * (to / from) ** share;
  if (spacing === 'cos') return Math.acos(Math.cos(from) + share * (Math.cos(to) - Math.cos(from)));
  return from + share * (to - from);
}

/** Errors without a place are placed in the sweep. */
export function placed<T>(place: Place, work: () => T): T {
  try {
    return work();
  } catch (error) {
    throw error instanceof InputError ? error.at(place) : error;
  }
}
