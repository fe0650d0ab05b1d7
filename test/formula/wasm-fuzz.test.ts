import { expect, test } from 'vitest';
import { compareRandomExpressions } from './wasm-random.ts';

test('ten thousand random expressions agree step by step in both back ends', () => {
  // Each expression has several steps, at three points.
  expect(compareRandomExpressions(10_000, 20261)).toBeGreaterThan(100_000);
});
