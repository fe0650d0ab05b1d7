import { multiplyLower } from '../math/cholesky.ts';
import { covarianceOf, meanOf, weightedQuantiles } from '../math/moments.ts';
import { randomStream } from '../math/random.ts';
import { equalWeights } from './evidence.ts';
import type { Fit } from './fit.ts';
import type { ForwardModel } from './forward.ts';
import { guidedCube, scaledErrors, scaledOf } from './guided-cube.ts';
import { logLikelihood } from './likelihood.ts';
import type { Likelihood } from './likelihood.ts';
import { mergeNested, runNested } from './nested.ts';
import type { NestedRun, NestedState } from './nested.ts';
import { logPriorScaled } from './prior-cube.ts';
import { scaledBounds, valueFromScaled } from './prior.ts';
import type { FreeParameter } from './prior.ts';
import { runWalkers } from './walkers.ts';
import type { WalkerState } from './walkers.ts';

/** Where a sampling run stands, plain JSON. */
export type SamplingState = { readonly walkers: WalkerState } | { readonly nested: NestedState };

/** How much a sampler may spend. */
export interface SamplingEffort {
  readonly livePoints?: number;
  readonly maxSteps: number;
  readonly maxEvaluations?: number;
}

export interface PosteriorRequest {
  readonly method: 'walkers' | 'nested';
  readonly parameters: readonly FreeParameter[];
  readonly forward: ForwardModel;
  readonly likelihood: Likelihood;
  /** A least-squares fit: where walkers start and nested sampling looks first. */
  readonly fit: Pick<Fit, 'values' | 'covariance'>;
  readonly seed: number;
  readonly effort: SamplingEffort;
  readonly resume?: SamplingState;
  readonly onCheckpoint?: (state: SamplingState, progress: SamplingProgress) => void;
  readonly signal?: AbortSignal;
}

export interface SamplingProgress {
  readonly evaluations: number;
  /** How far it is, in a few words. */
  readonly words: string;
}

/** What the data say of the free parameters of one hypothesis. */
export interface Posterior {
  readonly method: 'walkers' | 'nested';
  /** Values in the units of the parameters, with weights that sum to 1 and ln likelihoods. */
  readonly samples: readonly Float64Array[];
  readonly weights: Float64Array;
  readonly logLikelihoods: Float64Array;
  /** ln Z with its standard deviation; walkers give none. */
  readonly logEvidence?: { readonly value: number; readonly error: number };
  readonly effectiveSamples: number;
  readonly evaluations: number;
  /** False where the numbers are not to be relied on, with the reason in a sentence. */
  readonly believable: boolean;
  readonly reason: string;
}

/**
 * Samples the posterior of a hypothesis, from its least-squares fit on. A hypothesis without free
 * parameters has its likelihood as evidence. Throws the signal's reason when aborted.
 */
export async function samplePosterior(request: PosteriorRequest): Promise<Posterior> {
  if (request.parameters.length > 0) return request.method === 'nested' ? sampleNested(request) : sampleWalkers(request);
  const values = new Float64Array(0);
  const lnL = await logLikelihoodOf(request)(values);
  return {
    method: request.method, samples: [values], weights: Float64Array.of(1), logLikelihoods: Float64Array.of(lnL),
    logEvidence: { value: lnL, error: 0 }, effectiveSamples: 1, evaluations: 1, believable: true, reason: '',
  };
}

/** Values, each as likely as the next, drawn from a posterior; seeded. */
export function drawPosterior(posterior: Pick<Posterior, 'samples' | 'weights'>, count: number, seed: number): Float64Array[] {
  return equalWeights(posterior.samples, posterior.weights, count, seed);
}

/** Mean, standard deviation and the 2.5, 16, 50, 84, 97.5 % points of one parameter. */
export interface PosteriorSummary {
  readonly mean: number;
  readonly sigma: number;
  readonly quantiles: readonly number[];
}

/** Summaries of every parameter, in their units. */
export function summarisePosterior({ samples, weights }: Pick<Posterior, 'samples' | 'weights'>): PosteriorSummary[] {
  const mean = meanOf(samples, weights);
  const covariance = covarianceOf(samples, mean, weights);
  const n = mean.length;
  return Array.from(mean, (value, j) => ({
    mean: value,
    sigma: Math.sqrt(covariance[j * n + j]),
    quantiles: weightedQuantiles(samples.map((sample) => sample[j]), [0.025, 0.16, 0.5, 0.84, 0.975], weights),
  }));
}

function logLikelihoodOf({ forward, likelihood, signal }: Pick<PosteriorRequest, 'forward' | 'likelihood' | 'signal'>): (values: Float64Array) => Promise<number> {
  return async (values) => logLikelihood(likelihood, likelihood.residuals(await forward(values, signal)));
}

async function sampleNested(request: PosteriorRequest): Promise<Posterior> {
  return posteriorOfRuns(request, [await runNestedOnce(request)]);
}

/** One nested-sampling run of a hypothesis with free parameters, plain JSON: several with different seeds make one posterior. */
export async function runNestedOnce(request: Omit<PosteriorRequest, 'method'>): Promise<NestedRun> {
  const { parameters, effort } = request;
  const cube = guidedCube(parameters, request.fit);
  const lnL = logLikelihoodOf(request);
  const { points, evaluations, converged, slicing } = await runNested({
    parameters: cube.sides,
    likelihood: (asked) =>
      Promise.all(
        asked.map(async (point) => {
          const values = cube.values(point);
          const weight = cube.logWeight(values);
          return weight === -Infinity ? -Infinity : weight + (await lnL(values));
        }),
      ),
    seed: request.seed,
    livePoints: effort.livePoints ?? Math.max(150, 25 * cube.sides),
    ...(effort.maxEvaluations !== undefined && { maxEvaluations: effort.maxEvaluations }),
    ...(request.resume && 'nested' in request.resume && { resume: request.resume.nested }),
    ...(request.signal && { signal: request.signal }),
    onCheckpoint: (state, { logEvidence, remaining }) =>
      request.onCheckpoint?.({ nested: state }, {
        evaluations: state.evaluations, words: `ln Z ${logEvidence.toFixed(1)}, ${remaining.toFixed(2)} still possible`,
      }),
  });
  return { points, evaluations, converged, slicing };
}

/** The posterior of one hypothesis from one or several of its nested-sampling runs, merged. `seed`: that of the first run. */
export function posteriorOfRuns({ parameters, fit, seed }: Pick<PosteriorRequest, 'parameters' | 'fit' | 'seed'>, runs: readonly NestedRun[]): Posterior {
  const cube = guidedCube(parameters, fit);
  const result = mergeNested(runs, seed);
  const samples = result.points.map(({ point }) => cube.values(point));
  return {
    method: 'nested',
    samples,
    weights: result.weights,
    logLikelihoods: Float64Array.from(result.points, ({ logLikelihood: value }, k) => value - cube.logWeight(samples[k])),
    logEvidence: { value: result.logEvidence, error: result.error },
    effectiveSamples: result.effectiveSamples,
    evaluations: result.evaluations,
    believable: result.converged,
    reason: result.converged ? '' : `The run ended after ${result.evaluations} models, before ln Z had settled: it is a lower limit.`,
  };
}

async function sampleWalkers(request: PosteriorRequest): Promise<Posterior> {
  const { parameters, effort } = request;
  const lnL = logLikelihoodOf(request);
  const valuesOf = (scaled: ArrayLike<number>): Float64Array => Float64Array.from(parameters, (parameter, j) => valueFromScaled(parameter, scaled[j]));
  const result = await runWalkers({
    density: (points) =>
      Promise.all(
        points.map(async (scaled) => {
          const prior = logPriorScaled(parameters, scaled);
          return prior === -Infinity ? -Infinity : prior + (await lnL(valuesOf(scaled)));
        }),
      ),
    start: walkerStarts(request),
    seed: request.seed,
    maxSteps: effort.maxSteps,
    ...(request.resume && 'walkers' in request.resume && { resume: request.resume.walkers }),
    ...(request.signal && { signal: request.signal }),
    onCheckpoint: (state, { timesSteps }) =>
      request.onCheckpoint?.({ walkers: state }, {
        evaluations: state.evaluations, words: `${state.steps} steps, autocorrelation time ${Math.max(...timesSteps).toFixed(0)}`,
      }),
  });
  return {
    method: 'walkers',
    samples: result.samples.map(valuesOf),
    weights: new Float64Array(result.samples.length).fill(1 / result.samples.length),
    logLikelihoods: result.sampleLogDensities.map((value, k) => value - logPriorScaled(parameters, result.samples[k])),
    effectiveSamples: result.effectiveSamples,
    evaluations: result.evaluations,
    believable: result.believable,
    reason: result.reason,
  };
}

/** Walkers scattered about the fit by its errors, within the prior. */
function walkerStarts({ parameters, fit, seed }: PosteriorRequest): Float64Array[] {
  const n = parameters.length;
  const centre = scaledOf(parameters, fit.values);
  const lower = fit.covariance && scaledErrors(parameters, fit.values, fit.covariance);
  const bounds = parameters.map(scaledBounds);
  const random = randomStream(seed, 'walkers start');
  return Array.from({ length: Math.max(16, 4 * n) }, () => {
    const z = Float64Array.from({ length: n }, () => random.gaussian());
    const shift = lower ? multiplyLower(lower, z) : z.map((value) => 0.05 * value);
    // A step beyond a bound is mirrored back, or made small where that leads beyond the other one.
    return centre.map((value, j) => {
      const [low, high] = bounds[j];
      const mirrored = (there: number): number => (there < low ? 2 * low - there : there > high ? 2 * high - there : there);
      const there = mirrored(value + shift[j]);
      return there >= low && there <= high ? there : mirrored(value + 1e-3 * (high - low) * random.uniform());
    });
  });
}
