import { z } from 'zod';
import { InputError, nearestHint } from './input-error.ts';
import { describeLimits, findLimitProblem } from './limits.ts';
import type { Limits } from './limits.ts';
import { canonicalQuantity, describeUnit, parseQuantity, wanted } from './quantity.ts';
import { quoteValue } from './quote.ts';
import { parseUnit, sameDimensions } from './unit.ts';

// The page forbids generated code; zod must not even try.
z.config({ jitless: true });

/**
 * A group of keys of which no other is allowed. `later` are keys of the format that this version
 * cannot compute: they are refused in those words.
 */
export function keys<Shape extends z.ZodRawShape>(shape: Shape, later: readonly string[] = []): z.ZodObject<Shape, z.core.$strict> {
  const allowed = Object.keys(shape);
  return z.strictObject(shape, {
    error: (issue) => {
      if (issue.code === 'unrecognized_keys') return unknownKey(issue.keys[0], allowed, later);
      return issue.input === undefined
        ? `is missing: a group of the keys ${allowed.join(', ')} is wanted`
        : `${quoteValue(issue.input)} is given where a group of the keys ${allowed.join(', ')} is wanted`;
    },
  });
}

/** The message about a key that does not exist, or not yet. */
function unknownKey(key: string, allowed: readonly string[], later: readonly string[] = []): string {
  if (later.includes(key)) return `"${key}" is not available in this version`;
  // In {a: b, c} the comma ends the text b: a common slip in prose.
  if (/\s/.test(key)) return `unknown key ${quoteValue(key)}: a text with a comma inside { } needs quotes`;
  return `unknown key ${quoteValue(key)}${nearestHint(key.slice(0, 60), allowed)}; allowed are ${allowed.join(', ')}`;
}

/** Text such as "2 kpc", checked against its limits, as a number in `internalUnit`. */
export function quantity(limits: Limits, internalUnit: string, meaning?: string): z.ZodType<number> {
  if (limits.unit === '') return plainNumber(limits, meaning);
  const what = `${wanted(limits.unit)} (${describeLimits(limits)})`;
  return z
    .string({
      error: ({ input }) => {
        if (input === undefined) return `is missing: ${what}`;
        if (typeof input === 'number' && Number.isFinite(input)) return `${quoteValue(input)} has no unit: ${wanted(limits.unit)}`;
        return `${quoteValue(input)} is given where ${what}`;
      },
    })
    .meta({ description: `${meaning ? `${meaning}; ` : ''}${describeUnit(limits.unit)}, ${describeLimits(limits)}` })
    .transform((text, context) =>
      orIssue(context, text, () => {
        const problem = findLimitProblem(parseQuantity(text, limits.unit), limits, quoteValue(text));
        if (problem) throw new InputError(problem);
        return parseQuantity(text, internalUnit);
      }),
    );
}

/** A plain number within limits whose unit is ''. */
export function plainNumber(limits: Limits, meaning?: string): z.ZodType<number> {
  const what = `a plain number is wanted (${describeLimits(limits)})`;
  return z
    .number({
      error: ({ input }) => (input === undefined ? `is missing: ${what}` : `${quoteValue(input)} is given where ${what}`),
    })
    .meta({
      description: `${meaning ? `${meaning}; ` : ''}${describeLimits(limits)}`,
      [limits.above ? 'exclusiveMinimum' : 'minimum']: limits.min,
      maximum: limits.max,
    })
    .transform((value, context) =>
      orIssue(context, value, () => {
        const problem = findLimitProblem(value, limits, String(value));
        if (problem) throw new InputError(problem);
        return value;
      }),
    );
}

/** A text that is not empty; `what` is named where it is missing or something else. */
export function words(what: string): z.ZodString {
  return z
    .string({
      error: ({ input }) =>
        input === undefined ? `is missing: ${what} is wanted` : `${quoteValue(input)} is given where ${what} is wanted`,
    })
    .regex(/\S/, { error: `is empty: ${what} is wanted` });
}

/** The name of a component or band: letters, digits, - and _, beginning with a letter. */
export function nameText(): z.ZodString {
  return words('a name').regex(/^[A-Za-z][A-Za-z0-9_-]{0,59}$/, {
    error: ({ input }) =>
      `${quoteValue(input)} is no name: a letter, then letters, digits, - or _ are wanted, 60 at most`,
  });
}

/** One of a few words. */
export function oneOf<const Options extends readonly string[]>(options: Options, what: string) {
  return z.enum(options, {
    error: ({ input }) => {
      const allowed = `${what} is one of ${options.join(', ')}`;
      if (input === undefined) return `is missing: ${allowed}`;
      const hint = typeof input === 'string' ? nearestHint(input.slice(0, 60), options) : '';
      return `${quoteValue(input)} is not allowed: ${allowed}${hint}`;
    },
  });
}

/** A list of at least `least` and at most `most` items; `what` names them in the plural. */
export function listOf<Item extends z.ZodType>(item: Item, what: string, least: number, most: number): z.ZodArray<Item> {
  const error = ({ input }: { input?: unknown }): string =>
    input === undefined ? `is missing: a list of ${what} is wanted` : `${quoteValue(input)} is given where a list of ${what} is wanted`;
  const size = `${least} to ${most} ${what} are allowed`;
  const wrongSize = ({ input }: { input?: unknown }): string => `${quoteValue(input)} is given: ${size}`;
  return z.array(item, { error }).min(least, { error: wrongSize }).max(most, { error: wrongSize });
}

function orIssue<T>(context: z.core.$RefinementCtx, input: unknown, compute: () => T): T {
  try {
    return compute();
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    context.issues.push({ code: 'custom', message: error.reason, input });
    return z.NEVER;
  }
}

/** Limits together with the unit that a checked number comes out in. */
export interface LimitedUnit {
  readonly limits: Limits;
  readonly internalUnit: string;
}

/**
 * Text that may be a quantity of one of several dimensions, such as a pixel in arcsec or in kpc:
 * a number in the `internalUnit` of the dimension it has, and that unit.
 */
export function quantityOfEither(kinds: readonly LimitedUnit[]): z.ZodType<{ readonly value: number; readonly unit: string }> {
  const what = kinds.map(({ limits }) => `${describeUnit(limits.unit)} such as "2 ${limits.unit}"`).join(' or ');
  return z
    .string({
      error: ({ input }) => (input === undefined ? `is missing: ${what} is wanted` : `${quoteValue(input)} is given where ${what} is wanted`),
    })
    .meta({ description: what })
    .transform((text, context) =>
      orIssue(context, text, () => {
        const given = canonicalQuantity(text).unit;
        const kind = kinds.find(({ limits }) => sameDimensions(parseUnit(given), parseUnit(limits.unit)));
        if (!kind) throw new InputError(`${quoteValue(text)} is ${describeUnit(given)}: ${what} is wanted`);
        const problem = findLimitProblem(parseQuantity(text, kind.limits.unit), kind.limits, quoteValue(text));
        if (problem) throw new InputError(problem);
        return { value: parseQuantity(text, kind.internalUnit), unit: kind.internalUnit };
      }),
    );
}
