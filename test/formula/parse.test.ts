import fc from 'fast-check';
import { create, all } from 'mathjs';
import { expect, test } from 'vitest';
import { buildFormula } from '../../src/formula/build.ts';
import { functionNames } from '../../src/formula/functions.ts';
import { FormulaError, parseFormula } from '../../src/formula/parse.ts';
import { evaluateFormula, graphOf, randomFormula } from './evaluate.ts';

const math = create(all, {});
const values = { a: 0.83, b: 1.27, K: 1.61 };

/** What mathjs makes of a formula, or undefined where that is no finite real number. */
function outside(text: string): number | undefined {
  const value: unknown = math.evaluate(text, { ...values });
  if (typeof value === 'boolean') return value ? 1 : 0;
  return typeof value === 'number' && Number.isFinite(value) ? value : undefined;
}

test.each([
  '-2^2', '2^3^2', '-a^-b', '2*-a', '2--a', '2^-1', '1-2-3', '8/4/2', '8/4*2', '2+3*4^2', '-(a+b)*K', '+a', '- -a', 'a-+b',
  'a < b', 'a <= a', 'a > b', 'b >= a', 'a == b', 'a != b', 'a < b ? K : 3', 'a > b ? 1 : b > K ? 2 : 3', '(a > b ? 1 : 2) + 1', 'a + 1 < b * 2',
  '1.5e-3', '.5', '5.', '1E+2', 'pi', '2*pi*a', 'a?b:K', '0 ? 1 : 2',
  'abs(-a)', 'sign(-a)', 'sqrt(a)', 'exp(a)', 'expm1(a)', 'log(a)', 'sin(a)', 'cos(a)', 'tan(a)', 'asin(a)', 'acos(a)', 'atan(a)',
  'sinh(a)', 'cosh(a)', 'tanh(a)', 'sech(a)', 'erf(a)', 'atan2(a, -b)', 'min(a,b)', 'max(a, b)', 'pow(a, b)', 'hypot(a,b)', '  a \t+\n b ',
])('%s means what mathjs takes it to mean', (text) => {
  const expected = outside(text) ?? NaN;
  // Both sides round a few operations; mathjs' erf is good to 1e-15.
  expect(Math.abs(evaluateFormula(text, values) - expected)).toBeLessThanOrEqual(4e-15 * Math.abs(expected));
});

test('random formulas have the values of mathjs', () => {
  let compared = 0;
  fc.assert(
    fc.property(randomFormula, (text) => {
      const expected = outside(text);
      if (expected === undefined) return;
      compared++;
      // The normal form adds and multiplies in another order: rounding grows where terms cancel.
      const given = evaluateFormula(text, values);
      expect(Math.abs(given - expected), text).toBeLessThan(1e-10 * Math.max(1, Math.abs(expected)));
    }),
    { seed: 20240613, numRuns: 2000 },
  );
  expect(compared).toBeGreaterThan(1200);
});

test('mathjs knows every function that may be written but one, and diff by another name', () => {
  expect(functionNames().filter((name) => name !== 'diff' && !Object.hasOwn(math, name))).toEqual(['incompleteGamma2']);
});

const { graph, scope } = graphOf({ radius: 1, x: 2, y: 3 });

test.each<[text: string, column: number, message: RegExp]>([
  ['', 1, /unexpected the end of the formula/],
  ['   ', 4, /unexpected the end/],
  ['x +', 4, /unexpected the end/],
  ['x + * y', 5, /unexpected "\*"/],
  ['2x', 2, /unexpected "x"; write \* between factors/],
  ['2 x', 3, /write \* between factors/],
  ['(x)(y)', 4, /unexpected "\("; write \* between factors/],
  ['x y', 3, /write \* between factors/],
  ['x 2', 3, /write \* between factors/],
  ['x = 2', 3, /"=" is not allowed.*compare with ==/],
  ['x === 2', 5, /compare with ==/],
  ['"x"', 1, /text is not allowed/],
  ["x + 'y'", 5, /text is not allowed/],
  ['x.y', 2, /members are not allowed/],
  ['Math.sin(x)', 5, /members are not allowed/],
  ['x[0]', 2, /only parentheses group/],
  ['{x}', 1, /only parentheses group/],
  ['x; y', 2, /";" is not allowed/],
  ['x % 2', 3, /"%" is not allowed/],
  ['x && y', 3, /"&" is not allowed/],
  ['1e999', 1, /1e999 is too large/],
  ['(x', 3, /expected "\)" to close the one at character 1, found the end/],
  ['x)', 2, /unexpected "\)"/],
  ['((x + y)', 9, /to close the one at character 1/],
  ['x ? y', 6, /expected ":" between the two values/],
  ['x < y < 2', 7, /comparisons cannot be chained/],
  ['sine(x)', 1, /unknown function "sine" \(did you mean "sin"\?\); allowed: abs sign sqrt/],
  ['constructor(x)', 1, /unknown function "constructor"/],
  ['sin()', 1, /sin takes 1 argument, given 0/],
  ['sin(x, y)', 1, /sin takes 1 argument, given 2/],
  ['x + atan2(y)', 5, /atan2 takes 2 arguments, given 1/],
  ['sin x', 5, /write \* between factors/],
  ['min(x,)', 7, /unexpected "\)"/],
  ['1 + radus', 5, /unknown name "radus" \(did you mean "radius"\?\); known: radius x y/],
  ['__proto__', 1, /unknown name "__proto__"/],
  ['sin', 1, /unknown name "sin"/],
  ['diff(x^2, x*y)', 11, /second argument of diff is a coordinate or a parameter/],
  ['diff(x^2, 2)', 11, /second argument of diff/],
  ['√x', 1, /"√" is not allowed/],
])('%j is refused at character %i', (text, column, message) => {
  let error: unknown;
  try {
    buildFormula(graph, text, scope);
  } catch (thrown) {
    error = thrown;
  }
  if (!(error instanceof FormulaError)) throw new Error(`no FormulaError but ${String(error)}`);
  expect(error.message).toMatch(message);
  expect(error.column).toBe(column);
  expect(error.message).toContain(`character ${column}:`);
  expect(error.formula).toBe(text);
});

test('nesting stops at 100 levels, well before the stack does', () => {
  const nested = (depth: number): string => `${'('.repeat(depth)}x${')'.repeat(depth)}`;
  expect(() => parseFormula(nested(99))).not.toThrow();
  expect(() => parseFormula(nested(4000))).toThrow(/nested deeper than 100 levels/);
  expect(() => parseFormula('-'.repeat(5000) + 'x')).toThrow(/nested deeper/);
  expect(() => parseFormula('2^'.repeat(4000) + 'x')).toThrow(/nested deeper/);
  expect(() => parseFormula(Array.from({ length: 500 }, () => 'x?1').join(':'))).toThrow(/nested deeper|expected/);
});

test('a long flat formula is no deep one', () => {
  const chain = (sign: string): string => Array.from({ length: 5000 }, () => 'x').join(sign);
  expect(evaluateFormula(chain('+'), { x: 0.5 })).toBe(2500);
  expect(evaluateFormula(chain('*'), { x: 1 })).toBe(1);
  expect(evaluateFormula(chain('-'), { x: 0.5 })).toBe(-2499);
  expect(() => parseFormula('x+'.repeat(5000) + 'x')).toThrow(/10001 characters, at most 10000/);
});

test('trees know where every part begins', () => {
  const tree = parseFormula(' 1 + sin( x )');
  expect(tree).toEqual({
    kind: 'operation',
    operator: '+',
    at: 1,
    args: [
      { kind: 'number', value: 1, at: 1 },
      { kind: 'call', name: 'sin', at: 5, args: [{ kind: 'name', name: 'x', at: 10 }] },
    ],
  });
});
