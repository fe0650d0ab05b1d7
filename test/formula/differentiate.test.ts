import fc from 'fast-check';
import { create, all } from 'mathjs';
import { expect, test } from 'vitest';
import { buildFormula } from '../../src/formula/build.ts';
import { differentiate } from '../../src/formula/differentiate.ts';
import { unaryFunctions, type UnaryName } from '../../src/formula/functions.ts';
import { interpretProgram } from '../../src/formula/javascript.ts';
import { lowerGraph } from '../../src/formula/lower.ts';
import { makeTable } from '../../src/math/table.ts';
import { relativeError } from '../sky/compare.ts';
import { evaluateDerivative, evaluateFormula, graphOf, randomFormula } from './evaluate.ts';

const math = create(all, {});
const values = { a: 0.83, b: 1.27, K: 1.61 };

/** Central difference, once extrapolated (Richardson 1911): error of order step^4. */
function slope(f: (x: number) => number, x: number, step = 1e-3): number {
  const central = (h: number): number => (f(x + h) - f(x - h)) / (2 * h);
  return (4 * central(step / 2) - central(step)) / 3;
}

test.each(Object.keys(unaryFunctions) as UnaryName[])('the slope of %s is that of central differences', (name) => {
  for (const x of [-0.93, -0.41, 0.07, 0.52, 0.88]) {
    if (name === 'log' && x < 0) continue;
    const text = `${name}(3*a^2*b/K)`;
    // For asin and acos the argument stays below 1 only for small values.
    const scale = name === 'asin' || name === 'acos' ? 0.3 : 1;
    const at = { a: x * scale, b: 1.1, K: 3.1 };
    const expected = slope((a) => evaluateFormula(text, { ...at, a }), at.a, 1e-4 * Math.abs(x));
    // Differences of 16-digit values over steps of 1e-4 keep about 11 digits.
    expect(Math.abs(evaluateDerivative(text, 'a', at) - expected)).toBeLessThan(3e-9 * Math.max(1, Math.abs(expected)));
  }
});

test.each([
  ['a^b', 'a'], ['a^b', 'b'], ['a^a', 'a'], ['pow(2, a)', 'a'], ['atan2(a, b)', 'a'], ['atan2(a, b)', 'b'], ['atan2(a*b, -a^2)', 'a'],
  ['hypot(a, b)', 'a'], ['sqrt(a*b)', 'b'], ['min(a, b^2)', 'a'], ['min(a^2, b)', 'b'], ['max(a^3, b)', 'b'], ['max(a, 2*a)', 'a'],
  ['a < b ? a^2 : a^3', 'a'], ['a > b ? a^2 : a^3', 'a'], ['a*b/(a + b)', 'b'], ['(a - b)^3/K', 'b'], ['K*a', 'K'], ['exp(-K*a^2)', 'K'],
  ['1/(a^2 + b^2)^2.5', 'a'], ['incompleteGamma2(a*K)', 'K'], ['abs(a - b)', 'a'], ['a/K', 'a'], ['K', 'a'], ['7', 'a'],
])('∂(%s)/∂%s is that of central differences', (text, by) => {
  const expected = slope((x) => evaluateFormula(text, { ...values, [by]: x }), values[by as 'a']);
  expect(Math.abs(evaluateDerivative(text, by, values) - expected)).toBeLessThan(1e-9 * Math.max(1, Math.abs(expected)));
});

test('random formulas have the derivatives that mathjs finds', () => {
  let compared = 0;
  fc.assert(
    fc.property(randomFormula, (text) => {
      const expected: unknown = math.derivative(text, 'a', { simplify: false }).evaluate({ ...values });
      if (typeof expected !== 'number' || !Number.isFinite(expected)) return;
      compared++;
      const given = evaluateDerivative(text, 'a', values);
      // Terms cancel in another order on the two sides.
      expect(Math.abs(given - expected), text).toBeLessThan(1e-9 * Math.max(1, Math.abs(expected)));
    }),
    { seed: 20240614, numRuns: 1000 },
  );
  expect(compared).toBeGreaterThan(600);
});

test('diff(f, v) inside a formula is ∂f/∂v, and may be nested', () => {
  const at = { x: 0.7, y: 1.3 };
  // d²/dx² sin(x y) = -y² sin(x y)
  expect(relativeError(evaluateFormula('diff(diff(sin(x*y), x), x)', at), -(1.3 ** 2) * Math.sin(0.7 * 1.3))).toBeLessThan(1e-15);
  expect(relativeError(evaluateFormula('diff(x^2*y, y) + diff(3, x)', at), 0.49)).toBeLessThan(1e-15);
});

test('a table differentiates into its own slope', () => {
  const table = makeTable((u) => Math.exp(u) * Math.sin(5 * u), 16, 11, 2);
  const { graph, scope } = graphOf({ x: 0 });
  const node = graph.table('curve', 0, buildFormula(graph, 'x^2', scope));
  const program = lowerGraph(graph, [differentiate(graph, node, graph.variable('x'))], ['x']);
  for (const x of [0.1, 0.55, 0.93]) {
    const [given] = interpretProgram(program, new Float64Array(0), [x], program.tables.map(() => table));
    const u = x * x;
    // Chebyshev interpolation of degree 11 over 1/16: 1e-13 in the slope.
    expect(relativeError(given, 2 * x * Math.exp(u) * (Math.sin(5 * u) + 5 * Math.cos(5 * u)))).toBeLessThan(1e-11);
  }
});

test('normal form cancels what is equal as it is built', () => {
  const { graph, scope } = graphOf({ r: 1, z: 1, S: 1 });
  const build = (text: string): unknown => graph.findConstant(buildFormula(graph, text, scope));
  expect(build('r*(1/r)')).toBe(1);
  expect(build('a_ - a_'.replaceAll('a_', 'sin(r*z)'))).toBe(0);
  expect(build('(r*z)^2/(z^2*r^2)')).toBe(1);
  expect(build('sqrt(r^2 + z^2)^2 - z^2 - r^2')).toBe(0);
  expect(build('diff(S*r/r, r)')).toBe(0);
  expect(build('3*(r + z) - 3*r - 2*z - z')).toBe(0);
  expect(build('r^0')).toBe(1);
  expect(build('0*sin(r)')).toBe(0);
  expect(buildFormula(graph, 'r + z', scope)).toBe(buildFormula(graph, 'z + r', scope));
  expect(buildFormula(graph, 'r*z*S', scope)).toBe(buildFormula(graph, 'S*(z*r)', scope));
  expect(build('r - z')).toBeUndefined();
});

test('powers of negative numbers are not joined into others', () => {
  expect(evaluateFormula('(x^2)^0.5', { x: -3 })).toBe(3);
  expect(evaluateFormula('sqrt(x^2)*x', { x: -3 })).toBe(-9);
  expect(evaluateFormula('(x^2)^1.5', { x: -2 })).toBe(8);
  expect(evaluateFormula('(-2*x)^0.5', { x: -2 })).toBe(2);
  expect(evaluateFormula('x^3', { x: -2 })).toBe(-8);
  expect(evaluateFormula('x^-3', { x: -2 })).toBe(-0.125);
});

test('1 - e^-u keeps its digits where u is small', () => {
  for (const u of [1e-3, 1e-9, 1e-14]) {
    const exact = u - u ** 2 / 2 + u ** 3 / 6 - u ** 4 / 24 + u ** 5 / 120;
    expect(relativeError(evaluateFormula('1 - exp(-u)', { u }), exact)).toBeLessThan(1e-13);
    expect(relativeError(evaluateFormula('K*(1 - exp(-u))/K', { u, K: 3 }), exact)).toBeLessThan(1e-13);
    expect(relativeError(evaluateFormula('2 - 2*exp(-u)', { u }), 2 * exact)).toBeLessThan(1e-13);
    expect(relativeError(evaluateFormula('exp(u) - 1', { u }), Math.expm1(u))).toBeLessThan(1e-15);
    // ∂(1 - e^-u)/∂u = e^-u
    expect(relativeError(evaluateDerivative('1 - exp(-u)', 'u', { u }), Math.exp(-u))).toBeLessThan(1e-15);
  }
});
