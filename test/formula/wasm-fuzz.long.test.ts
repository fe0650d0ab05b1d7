import { expect, test } from 'vitest';
import { compareRandomExpressions } from './wasm-random.ts';

test('a hundred thousand random expressions agree step by step in both back ends', () => {
  expect(compareRandomExpressions(100_000, 777)).toBeGreaterThan(1_000_000);
});
