import { expect, test } from 'vitest';
import { binaryFunctions, unaryFunctions, type BinaryName, type UnaryName } from '../../src/formula/functions.ts';
import { Graph, type NodeId } from '../../src/formula/graph.ts';
import { lowerGraph } from '../../src/formula/lower.ts';
import { compileWasm } from '../../src/formula/wasm/kernel.ts';
import { makeTable, evaluateTable } from '../../src/math/table.ts';
import { makeRandom } from './wasm-random.ts';

/** Where functions change their ways: zeros, ones, ends of ranges, what is no number. */
const special = [
  0, -0, 1, -1, 0.5, -0.5, 2, -2, 3, -3, 0.1, 8, Infinity, -Infinity, NaN, 1e-300, -1e-300, 1e300, -1e300, 5e-324, 1e-310, 709.7, 709.9, 710.2, -708, -745, 1e6, 8e5, 8.1e5,
  1e15, 1e22, -1e22, 1e200, Math.PI, Math.PI / 2, 1.5 * Math.PI, 0.41421356237309503, 0.9999999999999999, 1.0000000000000002,
];

/** Special numbers, then random ones small, middling, and over 40 decades. */
function numbers(count: number, seed: number): Float64Array {
  const random = makeRandom(seed);
  const draw = (): number => {
    const kind = random();
    if (kind < 0.4) return (2 * random() - 1) * 3;
    if (kind < 0.6) return (2 * random() - 1) * 50;
    if (kind < 0.7) return (2 * random() - 1) * 712;
    if (kind < 0.9) return (random() < 0.5 ? -1 : 1) * 10 ** (40 * random() - 20);
    return 2 * random() - 1;
  };
  return Float64Array.from([...special, ...Array.from({ length: count }, draw)]);
}

function evaluate(build: (graph: Graph, x: NodeId, y: NodeId) => NodeId, x: Float64Array, y: Float64Array): Float64Array {
  const graph = new Graph();
  const program = lowerGraph(graph, [build(graph, graph.variable('x'), graph.variable('y'))], ['x', 'y']);
  const out = new Float64Array(x.length);
  compileWasm(program).evaluate(x.length, new Float64Array(0), [x, y], [out], []);
  return out;
}

/** Numbers below this may be flushed to 0, and only numbers near the largest may overflow apart. */
const [tiny, huge] = [1e-306, 1e307];

function worst(got: Float64Array, wanted: (k: number) => number): { error: number; at: number } {
  let [error, at] = [0, -1];
  got.forEach((value, k) => {
    const want = wanted(k);
    if (Object.is(value, want) || value === want) return;
    const bothHuge = Math.abs(value) > huge && Math.abs(want) > huge;
    const difference = Number.isNaN(value) || Number.isNaN(want) ? Infinity : bothHuge ? 0 : Math.abs(value - want) / Math.max(Math.abs(want), tiny / 1e-16);
    if (difference > error) [error, at] = [difference, k];
  });
  return { error, at };
}

// JavaScript's functions are right to 1 or 2 units of the last place, 2.2e-16 each; ours are asked for 1e-14 at worst.
const limits: Partial<Record<UnaryName | BinaryName, number>> = { exp: 2e-15, expm1: 5e-15, sinh: 5e-15, cosh: 2e-15, tanh: 5e-15, sech: 2e-15, erf: 4e-15, incompleteGamma2: 5e-15, pow: 4e-13 };

test.each(Object.keys(unaryFunctions) as UnaryName[])('%s of two numbers agrees with JavaScript', (name) => {
  const x = numbers(20_000, 11);
  const { error, at } = worst(evaluate((graph, u) => graph.unary(name, u), x, x), (k) => unaryFunctions[name](x[k]));
  expect(error, `${name}(${x[at]})`).toBeLessThan(limits[name] ?? 1e-15);
});

test.each(Object.keys(binaryFunctions) as BinaryName[])('%s of two pairs agrees with JavaScript', (name) => {
  const pairs = special.flatMap((a) => special.map((b) => [a, b] as const));
  const [more, others] = [numbers(20_000, 12), numbers(20_000, 13)];
  const x = Float64Array.from([...pairs.map(([a]) => a), ...more]);
  const y = Float64Array.from([...pairs.map(([, b]) => b), ...others]);
  const { error, at } = worst(evaluate((graph, a, b) => graph.binary(name, a, b), x, y), (k) => binaryFunctions[name](x[k], y[k]));
  // x^y = e^{y ln x} keeps 16 digits of y ln x, which may be 700.
  expect(error, `${name}(${x[at]}, ${y[at]})`).toBeLessThan(limits[name] ?? 1e-15);
});

test('pow keeps its digits where powers are moderate', () => {
  const random = makeRandom(14);
  const x = Float64Array.from({ length: 10_000 }, () => 10 ** (4 * random() - 2));
  const y = Float64Array.from({ length: 10_000 }, () => 4 * random() - 2);
  // |y ln x| < 10, so 10 · 2.2e-16.
  expect(worst(evaluate((graph, a, b) => graph.binary('pow', a, b), x, y), (k) => x[k] ** y[k]).error).toBeLessThan(3e-15);
});

test('an odd number of samples and a long run give what each sample gives alone', () => {
  const x = numbers(958, 15);
  const whole = evaluate((graph, u) => graph.unary('tanh', u), x, x);
  for (const k of [0, 1, 255, 256, 257, x.length - 1]) {
    const alone = evaluate((graph, u) => graph.unary('tanh', u), x.slice(k, k + 1), x.slice(k, k + 1));
    expect(alone[0]).toBe(whole[k]);
  }
});

test.each([[8, 5], [16, 8], [64, 11]])('tables of %i pieces of degree %i are read piece by piece, held at their ends', (pieces, degree) => {
  const table = makeTable((u) => Math.exp(2 * u), pieces, degree, 2);
  const graph = new Graph();
  const u = graph.variable('u');
  const program = lowerGraph(graph, [graph.table('t', 0, u), graph.table('t', 1, u)], ['u']);
  const random = makeRandom(16);
  const x = Float64Array.from([0, 1, -1, 2, 0.5, 1 / 64, NaN, Infinity, ...Array.from({ length: 1000 }, random)]);
  const out = [new Float64Array(x.length), new Float64Array(x.length)];
  compileWasm(program, { pieces, degree }).evaluate(x.length, new Float64Array(0), [x], out, [table]);
  for (const order of [0, 1]) {
    // The same sum in another order.
    expect(worst(out[order], (k) => evaluateTable(table, order, x[k])).error).toBeLessThan(1e-14);
  }
});
