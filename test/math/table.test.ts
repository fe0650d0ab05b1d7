import { expect, test } from 'vitest';
import { evaluateTable, makeTable } from '../../src/math/table.ts';

const points = Array.from({ length: 1001 }, (_, k) => k / 1000);

test('a polynomial of the degree of a table is kept exactly, its slopes too', () => {
  const f = (u: number): number => 3 * u ** 5 - u ** 2 + 0.25;
  const table = makeTable(f, 4, 5, 3);
  for (const u of points) {
    // Powers of t on quarter intervals: rounding of six terms, and of the factor 8 per derivative.
    expect(Math.abs(evaluateTable(table, 0, u) - f(u))).toBeLessThan(1e-14);
    expect(Math.abs(evaluateTable(table, 1, u) - (15 * u ** 4 - 2 * u))).toBeLessThan(1e-12);
    expect(Math.abs(evaluateTable(table, 2, u) - (60 * u ** 3 - 2))).toBeLessThan(1e-11);
  }
});

test('the error falls by two to the degree plus one as pieces double', () => {
  const errors = [4, 8, 16].map((pieces) => {
    const table = makeTable((u) => Math.sin(7 * u), pieces, 4);
    return Math.max(...points.map((u) => Math.abs(evaluateTable(table, 0, u) - Math.sin(7 * u))));
  });
  const orders = [Math.log2(errors[0] / errors[1]), Math.log2(errors[1] / errors[2])];
  for (const order of orders) expect(order).toBeGreaterThan(4.5);
  for (const order of orders) expect(order).toBeLessThan(5.5);
});

test('arguments outside [0, 1] are clamped to its ends', () => {
  const table = makeTable((u) => 2 + u, 3, 2);
  expect(Math.abs(evaluateTable(table, 0, -5) - 2)).toBeLessThan(1e-15);
  expect(Math.abs(evaluateTable(table, 0, 1.5) - 3)).toBeLessThan(1e-15);
});

test('pieces join without a step', () => {
  const table = makeTable(Math.exp, 8, 7);
  for (let piece = 1; piece < 8; piece++) {
    const [below, above] = [piece / 8 - 1e-13, piece / 8 + 1e-13].map((u) => evaluateTable(table, 0, u));
    // Degree 7 on pieces of 1/8: (1/32)^8 e/8! = 6e-17.
    expect(Math.abs(above - below)).toBeLessThan(1e-12);
  }
});
