import { fitModel } from '../../infer/fit.ts';
import { bestOverrides, forwardOf, freeHypothesis } from '../../infer/hypothesis.ts';
import type { FittedHypothesis } from '../../infer/rank.ts';
import type { Study } from '../../infer/study-types.ts';
import type { RayBackend } from '../../ray/job.ts';
import { sceneText } from '../../scene/parse-scene.ts';
import type { Scene } from '../../scene/types.ts';
import { InputError } from '../../units/input-error.ts';
import { convertQuantity } from '../../units/quantity.ts';
import type { WorkData } from './work-column.ts';

/** The best fit of one column. */
export interface FitPicture {
  readonly fitted: FittedHypothesis;
  /** Free parameters at their best, in their shown units, with standard errors: NaN where a bound holds one. */
  readonly best: readonly { readonly path: string; readonly value: number; readonly error: number; readonly unit: string }[];
  /** The column's scene with the best values written into it. */
  readonly sceneText: string;
  readonly evaluations: number;
}

/** Models computed so far and about how many there will be, with the lowest χ² so far. */
export type FitProgressTold = (done: number, expected: number, chi2: number) => void;

/** As `rank` on the command line does it. */
const starts = 4;
const descents = 2;

/** Fits the hypothesis of a name in a study to the data: the same numbers as the command line's. */
export async function workFit(
  study: Study, name: string, scene: Scene, text: string, { data, likelihood }: WorkData, backend: RayBackend, signal: AbortSignal, tell: FitProgressTold,
): Promise<FitPicture> {
  const hypothesis = study.hypotheses.find((one) => one.name === name);
  if (!hypothesis) throw new InputError(`the study has no hypothesis "${name}"`);
  // The scatter of drawn turbulence is judged on the command line only.
  const free = freeHypothesis(hypothesis, { ...study, turbulence: 'single' }, scene, data);
  const { parameters } = free;
  const expected = starts + 2 + descents * (parameters.length + 1) * 14;
  const fit = await fitModel({
    parameters,
    forward: forwardOf(free, data, backend),
    likelihood,
    seed: study.seed,
    starts: parameters.length === 0 ? 0 : starts,
    descents,
    signal,
    onProgress: ({ evaluations, chi2 }) => tell(evaluations, Math.max(expected, Math.ceil(1.15 * evaluations)), chi2),
  });
  return {
    fitted: {
      name,
      chi2: fit.chi2,
      logLikelihood: fit.logLikelihood,
      parameters: parameters.length,
      count: likelihood.count,
      residualCount: fit.residuals.length,
    },
    best: parameters.map(({ path, unit, shownUnit }, k) => ({
      path,
      value: convertQuantity(fit.values[k], unit, shownUnit),
      error: convertQuantity(fit.errors[k], unit, shownUnit),
      unit: shownUnit,
    })),
    sceneText: sceneText(text, name, bestOverrides(free, fit.values)),
    evaluations: fit.evaluations,
  };
}
