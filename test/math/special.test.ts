import { expect, test } from 'vitest';
import { erf, gamma, incompleteGamma2, kummerOfMinus, logGamma } from '../../src/math/special.ts';
import { needPython, pythonJson } from '../support/tools.ts';
import { relativeError } from '../sky/compare.ts';

/** Values of a scipy expression in x (and further names) over a list. */
function scipy(expression: string, inputs: readonly (readonly number[])[]): number[] {
  const code = `import json, sys, numpy as np, scipy.special as s
print(json.dumps([float(${expression}) for x in json.load(sys.stdin)]))`;
  return pythonJson(code, [], JSON.stringify(inputs)) as number[];
}

function worst(given: (input: readonly number[]) => number, expected: readonly number[], inputs: readonly (readonly number[])[]): number {
  return Math.max(...inputs.map((input, k) => relativeError(given(input), expected[k])));
}

const line = (from: number, to: number, count: number): number[][] => Array.from({ length: count }, (_, k) => [from + ((to - from) * k) / (count - 1)]);
const powers = (from: number, to: number): number[][] => Array.from({ length: to - from + 1 }, (_, k) => [10 ** (from + k)]);

test('erf is that of scipy', (context) => {
  needPython(context, 'scipy');
  const inputs = [...line(-6.5, 6.5, 400).filter(([x]) => x !== 0), ...powers(-12, -1)];
  // A series of up to 60 terms: a few units in the last place.
  expect(worst(([x]) => erf(x), scipy('s.erf(x[0])', inputs), inputs)).toBeLessThan(4e-15);
  expect(erf(0)).toBe(0);
});

test('incompleteGamma2 is that of scipy, relative to itself, down to u = 1e-9', (context) => {
  needPython(context, 'scipy');
  const inputs = [...powers(-9, 2), ...line(0.01, 40, 200)];
  // 1 - (1 + u) e^-u loses a digit just above u = 0.5, where the series hands over.
  expect(worst(([u]) => incompleteGamma2(u), scipy('s.gammainc(2, x[0])', inputs), inputs)).toBeLessThan(1e-14);
  expect(incompleteGamma2(0)).toBe(0);
});

test('incompleteGamma2 is smooth below zero too', () => {
  // u²/2 - u³/3 + u⁴/8: three terms are good to u³/30·u² of themselves.
  const u = -1e-4;
  expect(relativeError(incompleteGamma2(u), u ** 2 / 2 - u ** 3 / 3 + u ** 4 / 8)).toBeLessThan(1e-12);
});

test('logGamma and gamma are those of scipy', (context) => {
  needPython(context, 'scipy');
  const inputs = [...line(0.05, 30, 300), [0.5], [1.5], [100], [1e-3]];
  const expected = scipy('s.gammaln(x[0])', inputs);
  // The recurrence adds up to fifteen logarithms: absolute, because ln Γ passes through zero.
  inputs.forEach(([x], k) => expect(Math.abs(logGamma(x) - expected[k])).toBeLessThan(2e-14 * Math.max(1, Math.abs(expected[k]))));
  const small = inputs.filter(([x]) => x <= 30);
  // exp turns absolute errors of logGamma into relative ones.
  expect(worst(([x]) => gamma(x), scipy('s.gamma(x[0])', small), small)).toBeLessThan(1e-12);
});

test('₁F₁(a; b; -t) is that of scipy for the parameters of both Rice moments', (context) => {
  needPython(context, 'scipy');
  const times = [...powers(-6, 1), ...line(0.1, 100, 120)].map(([t]) => t);
  const inputs = [1.01, 1.25, 1.5, 1.75, 1.9, 2, 2.25, 2.6, 3].flatMap((q) => times.flatMap((t) => [[-q / 2, 1, t], [1 - q / 2, 3, t]]));
  // scipy's own hyp1f1 keeps about 13 digits around t = 30; beyond t = 60 the asymptotic series ends at 1e-13.
  expect(worst(([a, b, t]) => kummerOfMinus(a, b, t), scipy('s.hyp1f1(x[0], x[1], -x[2])', inputs), inputs)).toBeLessThan(3e-12);
});
