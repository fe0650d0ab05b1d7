import { expect, test } from 'vitest';
import { allLaws, drawPulls } from './law-draws.ts';

/**
 * Noise of 1/150 of the fraction: pulls are Gaussian only where the law is straight over the errors.
 * 1000 draws: the width is known to 2.2 %, 0.1 is more than 4 sigma.
 */
const draws = 1000;
const sigma = 0.002;

test.each(allLaws.map((law) => [law.name, law] as const))('%s: no bias from noise, and right errors', async (_, law) => {
  const { mean, width } = await drawPulls(law, sigma, draws);
  for (const value of mean) expect(Math.abs(value)).toBeLessThan(4 / Math.sqrt(draws));
  for (const value of width) expect(Math.abs(value - 1)).toBeLessThan(0.1);
}, 1_800_000);
