import fc from 'fast-check';
import { expect, test } from 'vitest';
import { buildFormula } from '../../src/formula/build.ts';
import { Graph } from '../../src/formula/graph.ts';
import { compileJavaScript, interpretProgram } from '../../src/formula/javascript.ts';
import { lowerGraph, operandsOf } from '../../src/formula/lower.ts';
import { makeTable } from '../../src/math/table.ts';
import { graphOf, randomFormula } from './evaluate.ts';

const lanes = ['a', 'b'];
const samples = [
  [0.83, 1.27],
  [-0.4, 0.9],
  [0, 2.5],
  [1e-9, -3],
];

test('generated code gives, bit for bit, what the interpreter gives', () => {
  fc.assert(
    fc.property(fc.array(randomFormula, { minLength: 1, maxLength: 3 }), (texts) => {
      const { graph, scope } = graphOf({ a: 0, b: 0, K: 0 });
      const program = lowerGraph(graph, texts.map((text) => buildFormula(graph, text, scope)), lanes);
      const parameters = Float64Array.from(program.parameters, () => 1.61);
      const out = texts.map(() => new Float64Array(samples.length));
      const columns = [0, 1].map((axis) => Float64Array.from(samples, (sample) => sample[axis]));
      compileJavaScript(program).evaluate(samples.length, parameters, columns, out, []);
      const expected = samples.map((sample) => interpretProgram(program, parameters, sample));
      expect(samples.map((_, k) => out.map((column) => column[k]))).toEqual(expected);
    }),
    { seed: 20240615, numRuns: 400 },
  );
});

test.each([
  'a < b ? a : b', 'a <= 0 ? -1 : 1', 'a == 0 ? 5 : a', 'a != 0 ? 5 : b', 'min(a, b)', 'max(a, b)', 'atan2(a, b)', 'abs(a)', 'sign(a)', 'a^2.7', 'abs(a)^b',
  'erf(a)', 'incompleteGamma2(a)', 'sech(a)', 'asin(a)', 'acos(a)', 'sqrt(abs(a))', '(a*b)^-2.5', 'a^40', 'a^-33', 'a^0.5*b^1.5', '1/(a*b^2*K^3)', '-K', '0', '1e300*a',
])('generated code and interpreter agree on %s', (text) => {
  const { graph, scope } = graphOf({ a: 0, b: 0, K: 0 });
  const program = lowerGraph(graph, [buildFormula(graph, text, scope)], lanes);
  const parameters = Float64Array.from(program.parameters, () => 1.61);
  const out = [new Float64Array(samples.length)];
  compileJavaScript(program).evaluate(samples.length, parameters, [0, 1].map((axis) => Float64Array.from(samples, (sample) => sample[axis])), out, []);
  expect([...out[0]]).toEqual(samples.map((sample) => interpretProgram(program, parameters, sample)[0]));
});

test('equal parts are computed once, and what is the same for all samples outside the loop', () => {
  const { graph, scope } = graphOf({ a: 0, b: 0, K: 0 });
  const program = lowerGraph(graph, ['sin(a*b) + exp(K)', 'sin(b*a)*exp(K)^2'].map((text) => buildFormula(graph, text, scope)), lanes);
  const unary = program.instructions.flatMap((instruction, value) => (instruction.op === 'unary' ? [[instruction.name, program.varying[value]]] : []));
  expect(unary).toHaveLength(2);
  expect(unary).toContainEqual(['sin', true]);
  expect(unary).toContainEqual(['exp', false]);
});

test('every operand stands before its use', () => {
  const { graph, scope } = graphOf({ a: 0, b: 0, K: 0 });
  const program = lowerGraph(graph, [buildFormula(graph, 'a < b ? (a*K)^2.5/b : atan2(a - b, K)', scope)], lanes);
  program.instructions.forEach((instruction, value) => {
    for (const operand of operandsOf(instruction)) expect(operand).toBeLessThan(value);
  });
});

test('a variable that is neither lane nor substituted is refused', () => {
  const graph = new Graph();
  expect(() => lowerGraph(graph, [graph.variable('q')], ['x'])).toThrow(/q/);
});

test('tables are read at run time', () => {
  const graph = new Graph();
  const program = lowerGraph(graph, [graph.table('curve', 0, graph.variable('a'))], lanes);
  const table = makeTable((u) => u * u, 4, 3);
  const out = [new Float64Array(1)];
  compileJavaScript(program).evaluate(1, new Float64Array(0), [Float64Array.of(0.6), Float64Array.of(0)], out, [table]);
  // A square is exact in a cubic: rounding alone.
  expect(Math.abs(out[0][0] - 0.36)).toBeLessThan(1e-15);
});

test('no text of a formula reaches the compiler', () => {
  const graph = new Graph();
  const hostile = graph.parameter('a];throw 1//');
  const program = lowerGraph(graph, [graph.add(hostile, graph.variable('a'))], lanes);
  const out = [new Float64Array(1)];
  compileJavaScript(program).evaluate(1, Float64Array.of(2), [Float64Array.of(1), Float64Array.of(0)], out, []);
  expect(out[0][0]).toBe(3);
});
