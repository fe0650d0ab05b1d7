import { jacobianColumns } from './exact-columns.ts';
import type { ForwardModel } from './forward.ts';
import { leastSquares } from './least-squares.ts';
import type { LeastSquaresResult } from './least-squares.ts';
import { chiSquared, logLikelihood } from './likelihood.ts';
import type { Likelihood } from './likelihood.ts';
import { priorResiduals, scaledBounds, scaledFromValue, slopeFromScaled, spreadStarts, valueFromScaled } from './prior.ts';
import type { FreeParameter } from './prior.ts';

export interface FitRequest {
  readonly parameters: readonly FreeParameter[];
  readonly forward: ForwardModel;
  readonly likelihood: Likelihood;
  readonly seed: number;
  /** Starts spread over the priors, besides the scene's own values and the middle of the priors. */
  readonly starts: number;
  /** How many of all starts, best chi2 first, are followed down. */
  readonly descents: number;
  /** Step of finite differences, for parameters that the model has no derivatives by, over a prior's width; default 1e-3, well above the noise of adaptive rays. */
  readonly relativeStep?: number;
  /** Default 100. */
  readonly maxIterations?: number;
  readonly onProgress?: (progress: FitProgress) => void;
  readonly signal?: AbortSignal;
}

export interface FitProgress {
  readonly stage: 'starts' | 'descent';
  /** Starts tried, or the number of this descent, from 1; and of how many. */
  readonly step: number;
  readonly steps: number;
  readonly evaluations: number;
  /** Lowest chi2 so far, priors included. */
  readonly chi2: number;
}

export interface Fit {
  /** In the units of the parameters. */
  readonly values: Float64Array;
  /** Standard errors; NaN where held by a bound or undetermined. */
  readonly errors: Float64Array;
  /** [row * n + column], 0 for parameters held by a bound; undefined where undetermined. */
  readonly covariance?: Float64Array;
  readonly atBound: readonly (false | 'lower' | 'upper')[];
  readonly converged: boolean;
  /** Of the data alone, and of the normal priors. */
  readonly chi2: number;
  readonly priorChi2: number;
  readonly logLikelihood: number;
  /** Whitened residuals of the data. */
  readonly residuals: Float64Array;
  readonly evaluations: number;
  /** End of each descent, best first: how well the starts agree. */
  readonly descents: readonly { readonly values: Float64Array; readonly chi2: number; readonly converged: boolean }[];
}

/**
 * Fits the free parameters of a model to data by least squares from several starts: the scene's own
 * values, the middle of the priors and a seeded spread over them, ranked by chi2 before the best are followed down.
 * Derivatives are the model's own where it has them. Normal priors enter as residuals. Throws the signal's reason when aborted, and where no start
 * gives finite residuals.
 */
export async function fitModel(request: FitRequest): Promise<Fit> {
  const { parameters, likelihood, signal } = request;
  const bounds = parameters.map(scaledBounds);
  const lower = Float64Array.from(bounds, ([low]) => low);
  const upper = Float64Array.from(bounds, ([, high]) => high);
  const valuesOf = (scaled: Float64Array): Float64Array => scaled.map((u, j) => valueFromScaled(parameters[j], u));
  let evaluations = 0;
  let lowest = Infinity;
  const residuals = async (scaled: Float64Array, stop?: AbortSignal): Promise<Float64Array> => {
    const data = likelihood.residuals(await request.forward(valuesOf(scaled), stop));
    const prior = priorResiduals(parameters, scaled);
    const all = new Float64Array(data.length + prior.length);
    all.set(data);
    all.set(prior, data.length);
    evaluations++;
    lowest = Math.min(lowest, chiSquared(all));
    return all;
  };
  const report = (stage: FitProgress['stage'], step: number, steps: number): void =>
    request.onProgress?.({ stage, step, steps, evaluations, chi2: lowest });

  // Rank the starts.
  const own = Float64Array.from(parameters, (parameter, j) =>
    Math.min(upper[j], Math.max(lower[j], scaledFromValue(parameter, parameter.start))),
  ).map((u, j) => (Number.isFinite(u) ? u : lower[j]));
  const middle = Float64Array.from(parameters, ({ prior }, j) => (prior.kind === 'normal' ? Math.min(upper[j], Math.max(lower[j], 0)) : 0.5));
  const starts = request.starts > 0 ? [own, middle, ...spreadStarts(parameters, request.starts, request.seed)] : [own];
  const ranked: { start: Float64Array; chi2: number }[] = [];
  for (const [k, start] of starts.entries()) {
    signal?.throwIfAborted();
    ranked.push({ start, chi2: chiSquared(await residuals(start, signal)) });
    report('starts', k + 1, starts.length);
  }
  ranked.sort((a, b) => a.chi2 - b.chi2);

  // Follow the best of them down.
  const steps = { central: false, relativeStep: request.relativeStep ?? 1e-3, sizes: new Float64Array(parameters.length).fill(1), lower, upper };
  const followed = ranked.slice(0, Math.max(1, request.descents));
  const ends: LeastSquaresResult[] = [];
  for (const [k, { start }] of followed.entries()) {
    ends.push(
      await leastSquares(residuals, start, {
        lower, upper, signal,
        jacobian: (at, stop, there) => jacobianColumns({ parameters, forward: request.forward, likelihood, residuals, steps, onModel: () => evaluations++ }, at, there, stop),
        // A change of chi2 that no error bar sees, and that adaptive rays could not resolve.
        tolerance: 1e-7,
        resolution: 0.01,
        maxIterations: request.maxIterations ?? 100,
        onProgress: () => report('descent', k + 1, followed.length),
      }),
    );
  }
  ends.sort((a, b) => a.chi2 - b.chi2);
  const best = ends[0];

  // Back to the units of the parameters.
  const slopes = best.values.map((u, j) => slopeFromScaled(parameters[j], u));
  const n = parameters.length;
  const dataCount = best.residuals.length - priorResiduals(parameters, best.values).length;
  const data = best.residuals.slice(0, dataCount);
  return {
    values: valuesOf(best.values),
    errors: best.errors.map((error, j) => error * slopes[j]),
    covariance: best.covariance?.map((value, k) => value * slopes[Math.floor(k / n)] * slopes[k % n]),
    atBound: best.atBound,
    converged: best.converged,
    chi2: chiSquared(data),
    priorChi2: chiSquared(best.residuals.slice(dataCount)),
    logLikelihood: logLikelihood(likelihood, data),
    residuals: data,
    evaluations,
    descents: ends.map(({ values, chi2, converged }) => ({ values: valuesOf(values), chi2, converged })),
  };
}

/** Correlation coefficients [row * n + column] of a covariance; NaN where a variance is 0. */
export function correlations(covariance: Float64Array): Float64Array {
  const n = Math.sqrt(covariance.length);
  return covariance.map((value, k) => {
    const [a, b] = [Math.floor(k / n), k % n];
    return value / Math.sqrt(covariance[a * n + a] * covariance[b * n + b]);
  });
}
