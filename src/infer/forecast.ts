import { logDeterminantOf } from '../math/cholesky.ts';
import { fitModel } from './fit.ts';
import type { Fit } from './fit.ts';
import type { ForwardModel } from './forward.ts';
import { logPriorNormalised, scaledErrors, scaledOf } from './guided-cube.ts';
import type { Likelihood } from './likelihood.ts';
import type { FreeParameter } from './prior.ts';

/** A hypothesis with the values that it is assumed true at. */
export interface ForecastHypothesis {
  readonly parameters: readonly FreeParameter[];
  readonly values: Float64Array;
  /** Of the planned data. */
  readonly forward: ForwardModel;
}

/** What planned data would say if one hypothesis were true. */
export interface ExpectedEvidence {
  /** Expected ln Z of the true one less that of the other. */
  readonly deltaLogEvidence: number;
  /** How much it would scatter from one noise to another. */
  readonly scatter: number;
  /** Standard errors of the true one's parameters (Fisher matrix and priors); NaN where undetermined. */
  readonly errors: Float64Array;
  /** Where the other one would come nearest. */
  readonly otherValues: Float64Array;
}

/**
 * The evidence that planned data would give for a true hypothesis against another: data without
 * noise are simulated from the true one and the other is fitted to them by least squares, from its
 * own values on. With residuals r left, noise adds its expectation and scatter in closed form
 * (linear in the parameters near the fit): E(ln L_true - ln L_other) = (|r|^2 + n_true - n_other)/2,
 * scatter |r|; ln Z follows by Laplace's approximation with the priors. `likelihood` is that of the
 * planned data with zero in place of values, so that its residuals are the whitened model's, reversed.
 */
export async function expectedEvidence(
  truth: ForecastHypothesis, other: ForecastHypothesis, likelihood: Likelihood, signal?: AbortSignal,
): Promise<ExpectedEvidence> {
  const simulated = likelihood.residuals(await truth.forward(truth.values, signal));
  const withData: Likelihood = {
    ...likelihood,
    residuals: (model) => likelihood.residuals(model).map((value, k) => value - simulated[k]),
  };
  const fit = (hypothesis: ForecastHypothesis): Promise<Fit> =>
    fitModel({
      parameters: hypothesis.parameters.map((parameter, j) => ({ ...parameter, start: hypothesis.values[j] })),
      forward: hypothesis.forward, likelihood: withData, seed: 0, starts: 0, descents: 1, ...(signal && { signal }),
    });
  const [own, wrong] = [await fit(truth), await fit(other)];
  const spare = truth.parameters.length - other.parameters.length;
  const difference = wrong.chi2 - own.chi2;
  return {
    deltaLogEvidence: (difference + spare) / 2 + occam(truth.parameters, own) - occam(other.parameters, wrong),
    scatter: Math.sqrt(Math.max(0, difference)),
    errors: own.errors,
    otherValues: wrong.values,
  };
}

/** ln Z less ln L at the best fit: ln of prior density times the volume of the posterior (Laplace; MacKay 2003, section 28.1). */
function occam(parameters: readonly FreeParameter[], fit: Fit): number {
  const n = parameters.length;
  if (n === 0) return 0;
  const lower = fit.covariance && scaledErrors(parameters, fit.values, fit.covariance);
  // Without a covariance the data leave the prior as it is.
  if (!lower) return 0;
  return logPriorNormalised(parameters, scaledOf(parameters, fit.values)) + (n * Math.log(2 * Math.PI) + logDeterminantOf(lower, n)) / 2;
}
