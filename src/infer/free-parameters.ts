import { InputError } from '../units/input-error.ts';
import { formatQuantity, parseQuantity } from '../units/quantity.ts';
import type { FreeParameter, Prior } from './prior.ts';
import type { FreeText, PlacedText } from './study-types.ts';

/** What a scene says of one of its paths, in `unit`. */
export interface PathFacts {
  readonly unit: string;
  readonly range: readonly [number, number];
  readonly value: number;
}

/**
 * The free parameters of a hypothesis with their priors, in the units of their paths. `facts` looks
 * a path up in the scene and throws InputError where there is none. Throws InputError, placed in the
 * study, for wrong units, empty or disallowed ranges.
 */
export function resolveFree(free: readonly FreeText[], facts: (path: string) => PathFacts): FreeParameter[] {
  return free.map((text) => {
    const { unit, range, value } = placed(text.place, () => facts(text.path));
    const [first, second] = text.values.map((part) => placed(part.place, () => parseQuantity(part.text, unit)));
    const prior = makePrior(text, first, second);
    for (const [k, bound] of text.kind === 'normal' ? [[0, first] as const] : [[0, first] as const, [1, second] as const]) {
      if (bound >= range[0] && bound <= range[1]) continue;
      const allowed = `${formatQuantity(range[0], unit)} to ${formatQuantity(range[1], unit)}`;
      throw new InputError(`${text.path}: ${text.values[k].text} is outside what is allowed, ${allowed}`, text.values[k].place);
    }
    return { path: text.path, unit, prior, allowed: range, start: value };
  });
}

function makePrior({ path, kind, values }: FreeText, first: number, second: number): Prior {
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
