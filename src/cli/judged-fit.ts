import { inSectors } from '../infer/sector-basis.ts';
import { realisationModels } from '../infer/hypothesis.ts';
import type { Fit } from '../infer/fit.ts';
import type { Likelihood } from '../infer/likelihood.ts';
import { jointLikelihood } from '../infer/other-data.ts';
import { isRandom, withScatter } from '../infer/random-scenes.ts';
import type { DataSet } from '../infer/types.ts';
import type { KeptFit } from './fit-store.ts';
import { fitHypothesis, type FitEffort, type PreparedHypothesis } from './hypothesis-run.ts';
import type { RunContext } from './run-context.ts';

/** A fit and the likelihood that it was judged by. */
export interface JudgedFit {
  readonly fit: Fit;
  readonly likelihood: Likelihood;
  /** Values at which the scatter of drawn turbulence was estimated; none where none is drawn. */
  readonly scatterAt?: Float64Array;
}

/**
 * What the hypotheses of a study have in common in their likelihoods: of maps as they are, or of
 * sectors of the first one's galaxy where one of them is judged by the scatter of its turbulence.
 */
export function commonLikelihood(data: DataSet, hypotheses: readonly PreparedHypothesis[], assumptions: string[]): Likelihood {
  const likelihood = jointLikelihood(data);
  const judge = hypotheses.find((one) => one.judge)?.judge;
  for (const { name, scene, judge: own } of hypotheses) {
    if (isRandom(scene) && !own) assumptions.push(singleWarning(name));
  }
  if (!judge || data.planes.length === 0) return likelihood;
  const { realisations, mean, rings, sectors } = judge;
  assumptions.push(`Turbulence is drawn: maps are compared in ${rings} rings of ${sectors} sectors a map, models are means of ${mean} realisations, and the scatter of ${realisations} is part of the likelihood.`);
  return inSectors(likelihood, data, hypotheses[0].scene.galaxy, judge);
}

/** What is wrong with a random scene that is judged without its scatter. */
export function singleWarning(name: string): string {
  return `Warning: "${name}" has drawn turbulence and is judged by one realisation: the disorder of the real galaxy counts as misfit, errors come out too small and differences too large.`;
}

/**
 * Fits a hypothesis. Where its turbulence is drawn, the scatter is estimated at the scene's own values,
 * the fit made, and both done once more from there. `known`: the fit of an earlier, interrupted run.
 */
export async function judgedFit(
  prepared: PreparedHypothesis, data: DataSet, common: Likelihood, seed: number, effort: FitEffort, context: RunContext, label: string, known?: KeptFit,
): Promise<JudgedFit> {
  if (!prepared.judge) return { likelihood: common, fit: await fitHypothesis(prepared, data, common, seed, effort, context, label, known) };
  if (known?.scatterAt) {
    const likelihood = await likelihoodAt(prepared, data, common, known.scatterAt, context);
    return { likelihood, scatterAt: known.scatterAt, fit: await fitHypothesis(prepared, data, likelihood, seed, effort, context, label, known) };
  }
  const own = Float64Array.from(prepared.parameters, ({ start }) => start);
  const first = await fitHypothesis(prepared, data, await likelihoodAt(prepared, data, common, own, context), seed, effort, context, `${label}, first pass`);
  const scatterAt = first.values;
  const likelihood = await likelihoodAt(prepared, data, common, scatterAt, context);
  const begun = { ...prepared, parameters: prepared.parameters.map((parameter, j) => ({ ...parameter, start: scatterAt[j] })) };
  return { likelihood, scatterAt, fit: await fitHypothesis(begun, data, likelihood, seed, { starts: 0, descents: 1 }, context, label) };
}

/** The likelihood of a hypothesis with the scatter of its turbulence at given values. */
export async function likelihoodAt(prepared: PreparedHypothesis, data: DataSet, common: Likelihood, values: Float64Array, { pool, progress, signal }: RunContext): Promise<Likelihood> {
  if (!prepared.judge) return common;
  const { realisations, mean } = prepared.judge;
  const maps: (readonly Float64Array[])[] = [];
  for (const model of realisationModels(prepared, data, pool.backend, realisations)) {
    maps.push(await model(values, signal));
    progress.show(`turbulence of ${prepared.name}`, maps.length, realisations, 'realisations');
  }
  return withScatter(common, maps, mean);
}
