import { makeLawFitter } from '../../src/infer/law-fit.ts';
import { randomStream } from '../../src/math/random.ts';
import { laws, sumsOfTwo } from '../../src/measure/laws/index.ts';
import type { Law } from '../../src/measure/laws/types.ts';

/** What is put in, well inside the bounds, so that every parameter shows between 1 and 3 GHz. */
export const truths: Readonly<Record<string, readonly number[]>> = {
  'thin-screen': [0.3, 0.5, 42],
  'burn-slab': [0.3, 0.5, 42],
  'external-dispersion': [0.3, 0.5, 42, 12],
  'internal-dispersion': [0.3, 0.5, 42, 15],
  'asymmetric-slab': [0.3, 0.5, -42, 55],
  'twisted-slab': [0.3, 0.5, 42, 1.2],
  'exponential-disc': [0.3, 0.5, 60, 0.7],
  'depth-gradient': [0.3, 0.5, 42, 30],
  'partial-cover': [0.3, 0.5, 42, 18, 0.7],
  'resolved-cover': [0.3, 0.5, 42, 18, 0.7],
  'tribble-screen': [0.3, 0.5, 42, 40, 1],
  'two-slabs': [0.3, 0.5, 60, 0.2, 1.3, -45],
  'thin-screen+thin-screen': [0.3, 0.5, 60, 0.2, 1.3, -45],
  'thin-screen+external-dispersion': [0.2, 0.5, 90, 0.3, 1.3, -45, 14],
  'external-dispersion+external-dispersion': [0.3, 0.5, 90, 10, 0.2, 1.3, -75, 14],
  'burn-slab+burn-slab': [0.3, 0.5, 160, 0.2, 1.3, -95],
};

const lambda2 = Float64Array.from({ length: 48 }, (_, k) => (0.299792458 / (1 + (2 * k) / 47)) ** 2);

export const allLaws: readonly Law[] = [...laws, ...sumsOfTwo];

/** Pulls (found less put in, over the stated error) of every parameter over many draws of noise: mean and width. */
export async function drawPulls(law: Law, sigma: number, draws: number): Promise<{ mean: number[]; width: number[]; chi2: number }> {
  const truth = truths[law.name];
  const fitter = makeLawFitter(law, lambda2, lambda2.map(() => sigma), 250);
  const clean = Array.from(lambda2, (square) => law.value(square, truth));
  const pulls: number[][] = truth.map(() => []);
  let chi2 = 0;
  for (let draw = 0; draw < draws; draw++) {
    const { gaussian } = randomStream(draw, `laws/${law.name}`);
    const q = Float64Array.from(clean, ({ re }) => re + sigma * gaussian());
    const u = Float64Array.from(clean, ({ im }) => im + sigma * gaussian());
    const fit = await fitter.fit({ q, u });
    chi2 += fit.chi2 / fit.degreesOfFreedom / draws;
    truth.forEach((value, k) => pulls[k].push((fit.values[k] - value) / fit.errors[k]));
  }
  const mean = pulls.map((list) => list.reduce((sum, pull) => sum + pull, 0) / draws);
  const width = pulls.map((list, k) => Math.sqrt(list.reduce((sum, pull) => sum + (pull - mean[k]) ** 2, 0) / (draws - 1)));
  return { mean, width, chi2 };
}
