import { z } from 'zod';
import { keys, listOf, oneOf, words } from '../units/schema.ts';
import { quoteValue } from '../units/quote.ts';

/** Names that formulas, scenes or this program use themselves, so no parameter may have them. */
export const reservedNames: readonly string[] = [
  'e', 'i', 'pi', 'r', 'phi', 'model', 'name', 'parameters', 'choices', 'define', 'potential', 'euler', 'field',
  'edges', 'armPotential', 'normalisation', 'heightIndex', 'heightAt', 'filling', 'arms', 'flare', 'hole',
];

const identifier = /^[A-Za-z][A-Za-z0-9]{0,39}$/;
const number = z.number({
  error: ({ input }) => (input === undefined ? 'is missing: a number is wanted' : `${quoteValue(input)} is given where a number is wanted`),
});

const word = z.string().regex(identifier, {
  error: ({ input }) => `${quoteValue(input)} is no name: a letter, then letters and digits are wanted, 40 at most`,
});

/** Messages of a map: what is wrong with a key, or that there is no map. */
function issueAtKey(what: string) {
  return (issue: z.core.$ZodRawIssue): string => {
    if (issue.code === 'invalid_key') return (issue.issues as readonly { readonly message: string }[])[0].message;
    return issue.input === undefined ? `is missing: ${what}` : `${quoteValue(issue.input)} is given where ${what}`;
  };
}

/** Text of a formula; a bare number is one too. */
export const formulaText = z
  .union([words('a formula'), number], {
    error: ({ input }) =>
      input === undefined ? 'is missing: a formula is wanted' : `${quoteValue(input)} is given where a formula is wanted`,
  })
  .transform(String);

/** Formulas by name: definitions, or components of a vector. */
export const formulasByName = z.record(word, formulaText, { error: issueAtKey('named formulas are wanted') });

export const eulerFormulas = keys({ a: formulaText, b: formulaText });

const parameter = {
  unit: z.string({ error: ({ input }) => (input === undefined ? 'is missing: a unit, or "" for a plain number, is wanted' : `${quoteValue(input)} is no unit`) }),
  range: z.tuple([number, number], { error: 'a range [smallest, largest] of two numbers is wanted' }),
  meaning: words('the meaning'),
  default: number.optional(),
  group: words('the name of a group').optional(),
  whole: z.boolean({ error: 'true or false is wanted' }).optional(),
  nonZero: z.boolean({ error: 'true or false is wanted' }).optional(),
};

/** Parameters as a list of groups with `name`, or as a map by name; always a list afterwards. */
function parameters(asList: boolean) {
  if (asList) return listOf(keys({ name: word, ...parameter }), 'parameters', 0, 100);
  return z
    .record(word, keys(parameter), { error: issueAtKey('parameters by name, or a list of them, are wanted') })
    .transform((given) => Object.entries(given).map(([name, rest]) => ({ name, ...rest })));
}

const choice = keys({
  options: z.record(word, number, { error: issueAtKey('options with their numbers are wanted') }),
  default: word.optional(),
  meaning: words('the meaning'),
});

const point = z.tuple([number, number, number], { error: 'three numbers are wanted' });

const check = keys({
  parameters: z.record(z.string(), z.union([z.string(), z.number()], { error: 'a quantity or a word is wanted' })),
  at: point,
  field: point.optional(),
  density: number.optional(),
  source: words('the source of the number'),
});

/** The shape of a model file; what holds between its parts is checked in `model-file.ts`. */
export function modelSchema(parametersAsList: boolean) {
  return keys({
    name: words('a name').regex(/^[a-z][a-z0-9-]{0,59}$/, {
      error: ({ input }) => `${quoteValue(input)} is no model name: small letters, digits and - are wanted, as in the file's name`,
    }),
    kind: oneOf(['field', 'density'], 'kind'),
    title: words('a title'),
    meaning: words('the meaning'),
    source: words('the published source, or that it is an own definition,'),
    parameters: parameters(parametersAsList),
    choices: z.record(word, choice, { error: issueAtKey('choices by name are wanted') }).default({}),
    define: formulasByName.default({}),
    potential: formulasByName.optional(),
    armPotential: formulasByName.optional(),
    euler: eulerFormulas.optional(),
    field: formulasByName.optional(),
    density: formulaText.optional(),
    edges: keys({
      z: listOf(formulaText, 'heights', 0, 20).optional(),
      r: listOf(formulaText, 'radii', 0, 20).optional(),
    }).default({}),
    checks: listOf(check, 'checks', 2, 1000),
  });
}
