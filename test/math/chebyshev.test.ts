import { expect, test } from 'vitest';
import { chebyshevAt, chebyshevNodes, chebyshevTransform, lagrangeAt } from '../../src/math/chebyshev.ts';

/** J_m(a) by its power series (Abramowitz & Stegun 1964, 9.1.10); fine for a up to about 10. */
function bessel(m: number, a: number): number {
  let term = 1;
  for (let k = 1; k <= m; k++) term *= a / 2 / k;
  let sum = 0;
  for (let k = 0; k < 80; k++) {
    sum += term;
    term *= -((a / 2) ** 2) / ((k + 1) * (k + 1 + m));
  }
  return sum;
}

test('coefficients of e^{iax} are those of Jacobi and Anger', () => {
  // cos(ax) = J_0 + 2 Σ (-1)^k J_2k T_2k, sin(ax) = 2 Σ (-1)^k J_2k+1 T_2k+1 (Abramowitz & Stegun 1964, 9.1.44-45 with x = cos θ).
  for (const a of [0.3, 2.2, 7]) {
    const count = 32;
    const [nodes, matrix] = [chebyshevNodes(count), chebyshevTransform(count)];
    const values = nodes.map((x) => Math.cos(a * x) + Math.sin(a * x));
    for (let m = 0; m < count; m++) {
      let sum = 0;
      for (let j = 0; j < count; j++) sum += matrix[m * count + j] * values[j];
      const expected = (m === 0 ? 1 : 2) * (-1) ** Math.floor(m / 2) * bessel(m, a);
      // Rounding of 32 terms of size 1.
      expect(Math.abs(sum - expected)).toBeLessThan(1e-14);
    }
  }
});

test('nodes fall from 1 to -1, and their polynomial goes through all values', () => {
  const count = 7;
  const [nodes, matrix] = [chebyshevNodes(count), chebyshevTransform(count)];
  expect([nodes[0], nodes[3], nodes[6]]).toEqual([1, 0, -1]);
  const values = nodes.map((_, j) => Math.cos(3 * j) + j);
  nodes.forEach((x, j) => {
    const polynomials = chebyshevAt(x, count);
    let sum = 0;
    for (let m = 0; m < count; m++) for (let k = 0; k < count; k++) sum += polynomials[m] * matrix[m * count + k] * values[k];
    expect(Math.abs(sum - values[j])).toBeLessThan(1e-13);
  });
});

test('Lagrange polynomials reproduce a cubic from four nodes', () => {
  const nodes = [-1, -0.2, 0.5, 2];
  const cubic = (x: number): number => 1 - 2 * x + 3 * x * x - x ** 3;
  for (const x of [-0.7, 0, 1.3]) {
    const sum = lagrangeAt(x, nodes).reduce((total, share, k) => total + share * cubic(nodes[k]), 0);
    expect(Math.abs(sum - cubic(x))).toBeLessThan(1e-14);
  }
});
