import { fitModel } from '../../src/infer/fit.ts';
import type { ForwardModel } from '../../src/infer/forward.ts';
import type { Likelihood } from '../../src/infer/likelihood.ts';
import { samplePosterior } from '../../src/infer/posterior.ts';
import { valuesFromCube } from '../../src/infer/prior-cube.ts';
import type { FreeParameter } from '../../src/infer/prior.ts';
import { randomStream } from '../../src/math/random.ts';

/**
 * Simulation-based calibration (Talts et al. 2018): truths from the prior, data from the truths; the
 * posterior's share below each truth, which is uniform where posteriors are right. [run][parameter].
 */
export async function sharesBelowTruth(
  parameters: readonly FreeParameter[], forward: ForwardModel, base: Likelihood, runs: number, livePoints: number,
): Promise<number[][]> {
  const shares: number[][] = [];
  for (let run = 0; run < runs; run++) {
    const random = randomStream(11, 'calibration', run);
    const truth = valuesFromCube(parameters, parameters.map(() => random.uniform()));
    // Whitened: residuals of a model against zero data are minus its whitened maps.
    const data = base.residuals(await forward(truth)).map((value) => -value + random.gaussian());
    const likelihood: Likelihood = { ...base, residuals: (model) => base.residuals(model).map((value, k) => value + data[k]) };
    const fit = await fitModel({ parameters, forward, likelihood, seed: run, starts: 2, descents: 1 });
    const { samples, weights } = await samplePosterior({ method: 'nested', parameters, forward, likelihood, fit, seed: run, effort: { livePoints, maxSteps: 1 } });
    shares.push(parameters.map((_, j) => samples.reduce((sum, sample, k) => sum + (sample[j] < truth[j] ? weights[k] : 0), 0)));
  }
  return shares;
}

/** Largest distance of sorted shares from the uniform distribution, times sqrt(n): Kolmogorov-Smirnov. */
export function uniformDistance(shares: readonly number[]): number {
  const sorted = [...shares].sort((a, b) => a - b);
  const n = sorted.length;
  return Math.sqrt(n) * Math.max(...sorted.map((share, k) => Math.max((k + 1) / n - share, share - k / n)));
}
