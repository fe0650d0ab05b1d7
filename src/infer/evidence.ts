import { logSum } from '../math/moments.ts';
import { randomStream } from '../math/random.ts';

/** A point of a nested-sampling run, plain JSON. */
export interface NestedPoint {
  /** In the unit cube. */
  readonly point: readonly number[];
  readonly logLikelihood: number;
  /** The likelihood above which it was drawn; `fromPrior` for the first points. */
  readonly birth: number;
}

/** The birth of points drawn from the whole prior: below every likelihood, and plain JSON. */
export const fromPrior = -Number.MAX_VALUE;

/** Evidence and posterior weights of the points of a run, or of several together. */
export interface Evidence {
  readonly logEvidence: number;
  /** One standard deviation: of ln Z over simulated shrinkages. */
  readonly error: number;
  /** Information from prior to posterior, nat (Skilling 2006, section 3.3). */
  readonly information: number;
  /** Points by rising likelihood, with posterior weights that sum to 1. */
  readonly points: readonly NestedPoint[];
  readonly weights: Float64Array;
  /** (sum w)^2 / sum w^2. */
  readonly effectiveSamples: number;
}

/** Simulated shrinkages for the error; their scatter is good to 5 per cent. */
const simulations = 200;

/**
 * ln Z of nested sampling (Skilling 2006) from the likelihood of every point and that above which it
 * was born, in any order: the number of live points at each follows, so that runs merge by putting
 * their points together (Higson et al. 2018). Prior volume shrinks by exp(-1/live) at each point;
 * the error is the scatter over simulated shrinkages, Beta(live, 1) each. Throws where there are none.
 */
export function evidenceOf(given: readonly NestedPoint[], seed = 0): Evidence {
  if (given.length === 0) throw new Error('A run without points has no evidence.');
  const points = [...given].sort((a, b) => a.logLikelihood - b.logLikelihood);
  const live = liveCounts(points);
  const mean = live.map((count) => -1 / count);
  const logTerms = termsOf(points, mean);
  const logEvidence = logSum(logTerms);
  const weights = logTerms.map((term) => Math.exp(term - logEvidence));
  let information = -logEvidence;
  let squares = 0;
  weights.forEach((weight, k) => {
    if (weight > 0) information += weight * points[k].logLikelihood;
    squares += weight * weight;
  });
  const random = randomStream(seed, 'shrinkages');
  let [sum, sumSquares] = [0, 0];
  for (let draw = 0; draw < simulations; draw++) {
    const shrinkage = live.map((count) => Math.log(1 - random.uniform()) / count);
    const off = logSum(termsOf(points, shrinkage)) - logEvidence;
    sum += off;
    sumSquares += off * off;
  }
  const error = Math.sqrt(Math.max(0, sumSquares / simulations - (sum / simulations) ** 2));
  return { logEvidence, error, information, points, weights, effectiveSamples: 1 / squares };
}

/** Live points just before each point, by rising likelihood, dies; equal ones die one after another. */
function liveCounts(points: readonly NestedPoint[]): Float64Array {
  const births = Float64Array.from(points, ({ birth }) => birth).sort();
  let born = 0;
  return Float64Array.from(points, ({ logLikelihood }, dead) => {
    while (born < births.length && births[born] < logLikelihood) born++;
    return Math.max(1, born - dead);
  });
}

/** ln(L dX) of each point for given steps of ln X. */
function termsOf(points: readonly NestedPoint[], shrinkage: Float64Array): Float64Array {
  let logVolume = 0;
  return Float64Array.from(points, ({ logLikelihood }, k) => {
    // ln(X_before - X_after)
    const width = logVolume + Math.log(-Math.expm1(shrinkage[k]));
    logVolume += shrinkage[k];
    return logLikelihood + width;
  });
}

/** `count` points of equal weight drawn from weighted ones by systematic resampling, seeded. */
export function equalWeights<T>(points: readonly T[], weights: ArrayLike<number>, count: number, seed: number): T[] {
  const random = randomStream(seed, 'equal weights');
  let total = 0;
  for (let k = 0; k < weights.length; k++) total += weights[k];
  const drawn: T[] = [];
  let reached = 0;
  let next = random.uniform() / count;
  points.forEach((point, k) => {
    reached += weights[k] / total;
    while (next < reached && drawn.length < count) {
      drawn.push(point);
      next += 1 / count;
    }
  });
  while (drawn.length < count) drawn.push(points[points.length - 1]);
  return drawn;
}
