import { expect, test } from 'vitest';
import { gaussLegendre } from '../../src/math/quadrature.ts';
import { needPython, pythonJson } from '../support/tools.ts';
import { largestDifference } from '../sky/compare.ts';

test('nodes and weights are those of numpy', (context) => {
  needPython(context, 'numpy');
  const counts = [1, 2, 3, 8, 31, 64, 200];
  const expected = pythonJson(
    `import json, sys, numpy as np
print(json.dumps([[a.tolist() for a in np.polynomial.legendre.leggauss(n)] for n in json.load(sys.stdin)]))`,
    [],
    JSON.stringify(counts),
  ) as [number[], number[]][];
  counts.forEach((count, k) => {
    const { nodes, weights } = gaussLegendre(count);
    // Both sides are good to rounding; weights are as small as 1e-3 and lose no more than that.
    expect(largestDifference(nodes, expected[k][0])).toBeLessThan(4e-16);
    expect(largestDifference(weights, expected[k][1])).toBeLessThan(1e-14);
  });
});

test('n nodes integrate x^k exactly up to k = 2n - 1 and no farther', () => {
  const { nodes, weights } = gaussLegendre(5);
  const integral = (power: number): number => nodes.reduce((sum, x, k) => sum + weights[k] * x ** power, 0);
  for (let power = 0; power <= 9; power++) {
    expect(Math.abs(integral(power) - (power % 2 === 0 ? 2 / (power + 1) : 0))).toBeLessThan(1e-15);
  }
  expect(Math.abs(integral(10) - 2 / 11)).toBeGreaterThan(1e-4);
});

test('a rule without nodes is refused', () => {
  expect(() => gaussLegendre(0)).toThrow(RangeError);
  expect(() => gaussLegendre(2.5)).toThrow(/2.5/);
});
