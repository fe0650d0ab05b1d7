import { expect, test } from 'vitest';
import { meanAndScatter, weightedLine } from '../../src/math/statistics.ts';
import { needPython, pythonJson } from '../support/tools.ts';
import { relativeError } from '../sky/compare.ts';

const x = [0.004, 0.01, 0.031, 0.045, 0.052];
const y = [0.3, 0.71, 1.15, 2.6, 2.2];
const weights = [100, 25, 400, 9, 64];

test('the weighted line and its errors are those of numpy', (context) => {
  needPython(context, 'numpy');
  const [slope, intercept, slopeError, interceptError, chi2] = pythonJson(
    `import json, sys, numpy as np
x, y, w = map(np.array, json.load(sys.stdin))
p, c = np.polyfit(x, y, 1, w=np.sqrt(w), cov='unscaled')
print(json.dumps([*p, *np.sqrt(np.diag(c)), float(np.sum(w * (y - np.polyval(p, x))**2))]))`,
    [],
    JSON.stringify([x, y, weights]),
  ) as number[];
  const line = weightedLine(x, y, weights);
  // A well conditioned fit of five points.
  expect(relativeError(line.slope, slope)).toBeLessThan(1e-12);
  expect(relativeError(line.intercept, intercept)).toBeLessThan(1e-12);
  expect(relativeError(line.slopeError, slopeError)).toBeLessThan(1e-12);
  expect(relativeError(line.interceptError, interceptError)).toBeLessThan(1e-12);
  expect(relativeError(line.chi2, chi2)).toBeLessThan(1e-12);
});

test('a line through far-off x keeps its digits', () => {
  const line = weightedLine([1e6, 1e6 + 1, 1e6 + 2], [5, 7, 9], [1, 2, 1]);
  expect(relativeError(line.slope, 2)).toBeLessThan(1e-14);
  expect(weightedLine([1, 1], [2, 3], [1, 1]).slope).toBeNaN();
});

test('mean and scatter leave out blanks', () => {
  // 2, 4, 9: mean 5, sample variance (9 + 1 + 16)/2 = 13.
  expect(meanAndScatter([2, NaN, 4, 9])).toEqual({ mean: 5, scatter: Math.sqrt(13), count: 3 });
  expect(meanAndScatter([NaN])).toEqual({ mean: NaN, scatter: NaN, count: 0 });
  expect(meanAndScatter([3]).scatter).toBeNaN();
});
