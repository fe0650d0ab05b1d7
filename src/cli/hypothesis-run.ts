import { dirname, resolve } from 'node:path';
import type { Provenance } from '../files/fits-scene.ts';
import { sha256OfText } from '../files/sha256.ts';
import { measureOnData, type Measured } from '../figure/comparison.ts';
import { correlations, fitModel, type Fit } from '../infer/fit.ts';
import { chiSquared, logLikelihood, type Likelihood } from '../infer/likelihood.ts';
import { bestOverrides, forwardOf, freeHypothesis, type FreeHypothesis } from '../infer/hypothesis.ts';
import type { Hypothesis, Study } from '../infer/study-types.ts';
import type { DataSet } from '../infer/types.ts';
import type { Ring } from '../measure/ring-profile.ts';
import type { Override } from '../scene/overrides.ts';
import { sceneText } from '../scene/parse-scene.ts';
import type { Scene } from '../scene/types.ts';
import { formatQuantity } from '../units/quantity.ts';
import { InputError } from '../units/input-error.ts';
import { loadScene } from './load-scene.ts';
import type { RunContext } from './run-context.ts';

/** A hypothesis ready to be fitted, with the scene's file. */
export interface PreparedHypothesis extends FreeHypothesis {
  readonly sceneFile: string;
  readonly provenance: Provenance;
}

/** A fitted hypothesis with its best scene and maps. */
export interface FittedRun {
  readonly prepared: PreparedHypothesis;
  readonly fit: Fit;
  readonly bestScene: Scene;
  /** The scene's text with the best values written into it. */
  readonly bestProvenance: Provenance;
  /** Maps that match the data's planes. */
  readonly planes: readonly Float64Array[];
  readonly measured: Measured;
}

/** Reads a hypothesis's scene and checks its free parameters against it. */
export function prepareHypothesis(
  hypothesis: Hypothesis, study: Pick<Study, 'foreground' | 'calibration' | 'turbulence'>, studyFile: string, data: DataSet, overrides: readonly Override[],
): PreparedHypothesis {
  const sceneFile = resolve(dirname(studyFile), hypothesis.scene);
  const { scene, provenance } = placed(hypothesis, () => loadScene(sceneFile, overrides));
  return { ...freeHypothesis(hypothesis, study, scene, data), sceneFile, provenance };
}

/** How hard a fit looks for the lowest χ². */
export interface FitEffort {
  readonly starts: number;
  readonly descents: number;
}

/** Fits one hypothesis; `known` is the fit of an earlier, interrupted run. */
export async function fitHypothesis(
  prepared: PreparedHypothesis,
  data: DataSet,
  likelihood: Likelihood,
  seed: number,
  effort: FitEffort,
  context: RunContext,
  label: string,
  known?: Pick<Fit, 'values' | 'errors' | 'covariance' | 'atBound' | 'converged' | 'evaluations'>,
): Promise<Fit> {
  const { parameters } = prepared;
  const forward = forwardOf(prepared, data, context.pool.backend);
  if (known) {
    const residuals = likelihood.residuals(await forward(known.values, context.signal));
    return { ...known, chi2: chiSquared(residuals), priorChi2: 0, logLikelihood: logLikelihood(likelihood, residuals), residuals, descents: [] };
  }
  const expected = effort.starts + 2 + effort.descents * (parameters.length + 1) * 14;
  return fitModel({
    parameters,
    forward,
    likelihood,
    seed,
    starts: parameters.length === 0 ? 0 : effort.starts,
    descents: effort.descents,
    signal: context.signal,
    onProgress: ({ evaluations, chi2 }) =>
      context.progress.show(label, evaluations, Math.max(expected, Math.ceil(1.15 * evaluations)), 'models', `χ² ${chi2.toFixed(1)}`),
  });
}

/** The best scene of a fit, its maps on the data's grid, and what is measured on them. */
export async function finishHypothesis(prepared: PreparedHypothesis, fit: Fit, data: DataSet, ring: Ring, context: RunContext): Promise<FittedRun> {
  const bestScene = prepared.sceneOf(fit.values);
  const planes = await forwardOf(prepared, data, context.pool.backend)(fit.values, context.signal);
  const text = sceneText(prepared.provenance.sceneText, prepared.sceneFile, bestOverrides(prepared, fit.values));
  return {
    prepared,
    fit,
    bestScene,
    bestProvenance: { ...prepared.provenance, sceneText: text },
    planes,
    measured: measureOnData(data, bestScene, ring, planes),
  };
}

/** Best values as text with units, by path. */
export function bestTexts({ parameters }: PreparedHypothesis, fit: Fit): Record<string, string> {
  return Object.fromEntries(parameters.map(({ path, unit, shownUnit }, k) => [path, formatQuantity(fit.values[k], unit, shownUnit)]));
}

/** Standard errors as text with units, by path; null where a bound holds the parameter. */
export function errorTexts({ parameters }: PreparedHypothesis, fit: Fit): Record<string, string | null> {
  const text = (k: number): string | null =>
    Number.isFinite(fit.errors[k]) ? formatQuantity(fit.errors[k], parameters[k].unit, parameters[k].shownUnit) : null;
  return Object.fromEntries(parameters.map(({ path }, k) => [path, text(k)]));
}

/** Correlation coefficients by pairs of paths; empty where the covariance is undetermined. */
export function correlationTable({ parameters }: PreparedHypothesis, fit: Fit): Record<string, Record<string, number>> {
  if (!fit.covariance) return {};
  const coefficients = correlations(fit.covariance);
  const n = parameters.length;
  return Object.fromEntries(
    parameters.map(({ path }, row) => [
      path,
      Object.fromEntries(
        parameters.flatMap((other, column) => {
          const value = coefficients[row * n + column];
          return column !== row && Number.isFinite(value) ? [[other.path, Number(value.toFixed(4))]] : [];
        }),
      ),
    ]),
  );
}

/** Identifies a fit by all that goes into it. */
export function fitKey(studyText: string, prepared: PreparedHypothesis, data: DataSet, effort: FitEffort): string {
  const numbers = [...data.planes, ...(data.others ?? [])].map(({ values }) => values.reduce((sum, value, k) => sum + (Number.isFinite(value) ? value * (1 + (k % 97)) : 0), 0));
  return sha256OfText(JSON.stringify([studyText, prepared.name, prepared.provenance, numbers, effort])).slice(0, 24);
}

function placed<T>({ place }: Hypothesis, work: () => T): T {
  try {
    return work();
  } catch (error) {
    throw error instanceof InputError ? error.at(place) : error;
  }
}
