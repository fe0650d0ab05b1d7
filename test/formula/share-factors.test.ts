import { expect, test } from 'vitest';
import { Graph } from '../../src/formula/graph.ts';
import { interpretProgram } from '../../src/formula/javascript.ts';
import { lowerGraph, type Program } from '../../src/formula/lower.ts';

const count = (program: Program, what: string): number => program.instructions.filter((step) => (step.op === 'unary' ? step.name : step.op) === what).length;

test('exponentials of a product become one where one has no other use', () => {
  const graph = new Graph();
  const [x, y, z] = ['x', 'y', 'z'].map((name) => graph.variable(name));
  const [ex, ey, ez] = [x, y, z].map((node) => graph.unary('exp', graph.negate(node)));
  const program = lowerGraph(graph, [graph.multiply(ex, ey), graph.multiply(ex, ez, z)], ['x', 'y', 'z']);
  expect(count(program, 'exp')).toBe(2);
  const [first, second] = interpretProgram(program, new Float64Array(0), [0.3, 0.7, 1.1]);
  // e^-a e^-b rounds three times.
  expect(Math.abs(first / Math.exp(-1) - 1)).toBeLessThan(1e-15);
  expect(Math.abs(second / (1.1 * Math.exp(-1.4)) - 1)).toBeLessThan(1e-15);
});

test('exponentials that are needed alone stay', () => {
  const graph = new Graph();
  const [ex, ey] = ['x', 'y'].map((name) => graph.unary('exp', graph.variable(name)));
  expect(count(lowerGraph(graph, [graph.multiply(ex, ey), ex, ey], ['x', 'y']), 'exp')).toBe(2);
});

test('pairs of factors that products have in common are multiplied once', () => {
  const graph = new Graph();
  const [a, b, c, d, e] = ['a', 'b', 'c', 'd', 'e'].map((name) => graph.variable(name));
  const outputs = [graph.multiply(a, c, e), graph.multiply(b, c, e), graph.multiply(c, d, e)];
  const program = lowerGraph(graph, outputs, ['a', 'b', 'c', 'd', 'e']);
  // c·e, and one more for each product.
  expect(count(program, 'multiply')).toBe(4);
  expect(interpretProgram(program, new Float64Array(0), [2, 3, 5, 7, 11])).toEqual([110, 165, 385]);
});
