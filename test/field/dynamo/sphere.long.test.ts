import { expect, it } from 'vitest';
import { criticalAlpha } from './sphere.ts';

it('comes closer to C_alpha = 4.493 on finer grids', () => {
  const errors = [24, 48, 72].map((cells) => Math.abs(criticalAlpha(cells) / 4.49340946 - 1));
  expect(errors[2]).toBeLessThan(0.004);
  expect(errors[2]).toBeLessThan(errors[0]);
});
