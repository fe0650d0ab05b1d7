import { factorCholesky, multiplyLower, solveLower } from '../math/cholesky.ts';
import { covarianceOf, logSum, meanOf } from '../math/moments.ts';
import type { RandomStream } from '../math/random.ts';
import { logGamma } from '../math/special.ts';

/** centre + L y, |y| <= 1, plain JSON; L is a lower triangle [row * n + column]. */
export interface Ellipsoid {
  readonly centre: readonly number[];
  readonly lower: readonly number[];
  readonly logVolume: number;
}

/** A region given by overlapping ellipsoids. */
export type Bound = readonly Ellipsoid[];

/** A split must bring the volume below this share of the whole. */
const splitGain = 0.6;
/** Groups of points that are left out in turn to see how far a bound must be grown. */
const folds = 5;
/** Volume added beyond what the points left out ask for. */
const extraVolume = 1.15;

/**
 * Overlapping ellipsoids around points (after Feroz, Hobson & Bridges 2009): halved by two-means
 * as long as that saves volume, none smaller than its share of exp(`logVolume`), which the points
 * are known to fill. All are then grown until bounds made without a fifth of the points would have
 * held that fifth (own design), so that what lies outside is about one part in the number of points.
 */
export function boundPoints(points: readonly ArrayLike<number>[], logVolume: number): Bound {
  const bound = splitPoints(points, logVolume - Math.log(points.length));
  let reach = 1;
  for (let fold = 0; fold < folds; fold++) {
    const kept = points.filter((_, k) => k % folds !== fold);
    const without = splitPoints(kept, logVolume - Math.log(points.length));
    points.forEach((point, k) => {
      if (k % folds === fold) reach = Math.max(reach, Math.min(...without.map((one) => radius2(one, point))));
    });
  }
  const n = points[0].length;
  return bound.map((one) => grown(one, Math.sqrt(reach) * extraVolume ** (1 / n)));
}

/** ln of the summed volumes; more than that of the region where they overlap. */
export function boundLogVolume(bound: Bound): number {
  return logSum(bound.map(({ logVolume }) => logVolume));
}

/** A point from the region, uniform also where ellipsoids overlap. */
export function drawFromBound(bound: Bound, random: RandomStream): Float64Array {
  const total = boundLogVolume(bound);
  for (;;) {
    const point = drawFromAny(bound, total, random);
    if (isOnceCounted(bound, point, random)) return point;
  }
}

/**
 * The share of draws from a bound, within the unit cube, that would lie in a region of
 * exp(`logVolume`) inside it; estimated from a few hundred draws.
 */
export function boundEfficiency(bound: Bound, logVolume: number, random: RandomStream): number {
  const total = boundLogVolume(bound);
  const draws = 300;
  let kept = 0;
  for (let k = 0; k < draws; k++) {
    const point = drawFromAny(bound, total, random);
    if (isInCube(point) && isOnceCounted(bound, point, random)) kept++;
  }
  return Math.min(1, Math.exp(logVolume - total) * (draws / Math.max(1, kept)));
}

/** Is a point in the unit cube? */
export function isInCube(point: Float64Array): boolean {
  return point.every((value) => value >= 0 && value < 1);
}

/** A point from one of the ellipsoids, chosen by volume. */
function drawFromAny(bound: Bound, total: number, random: RandomStream): Float64Array {
  let left = random.uniform();
  const chosen = bound.find(({ logVolume }) => (left -= Math.exp(logVolume - total)) < 0) ?? bound[bound.length - 1];
  const direction = randomDirection(chosen.centre.length, random);
  const length = random.uniform() ** (1 / chosen.centre.length);
  const shift = multiplyLower(chosen.lower, direction.map((value) => value * length));
  return shift.map((value, j) => value + chosen.centre[j]);
}

/** True once for a point in one ellipsoid, every other time for one in two, and so on. */
function isOnceCounted(bound: Bound, point: Float64Array, random: RandomStream): boolean {
  if (bound.length === 1) return true;
  const holding = bound.filter((one) => radius2(one, point) <= 1 + 1e-12).length;
  return holding <= 1 || random.uniform() * holding < 1;
}

/** A unit vector of any direction. */
export function randomDirection(n: number, random: RandomStream): Float64Array {
  const vector = Float64Array.from({ length: n }, () => random.gaussian());
  const length = Math.hypot(...vector);
  return vector.map((value) => value / length);
}

/** The ellipsoid that a point lies deepest in. */
export function closestEllipsoid(bound: Bound, point: ArrayLike<number>): Ellipsoid {
  let best = bound[0];
  let least = Infinity;
  for (const one of bound) {
    const distance = radius2(one, point);
    if (distance < least) [best, least] = [one, distance];
  }
  return best;
}

/** |y|^2 of a point on an ellipsoid's own scale: 1 on its surface. */
export function radius2({ centre, lower }: Ellipsoid, point: ArrayLike<number>): number {
  const y = solveLower(lower, Float64Array.from(point, (value, j) => value - centre[j]));
  let sum = 0;
  for (const value of y) sum += value * value;
  return sum;
}

/** ln volume of the unit ball. */
function logBall(n: number): number {
  return (n / 2) * Math.log(Math.PI) - logGamma(n / 2 + 1);
}

function grown({ centre, lower, logVolume }: Ellipsoid, factor: number): Ellipsoid {
  return { centre, lower: lower.map((value) => value * factor), logVolume: logVolume + centre.length * Math.log(factor) };
}

/** The ellipsoid of the points' covariance that holds them all, at least exp(`logShare`) per point in volume. */
function aroundPoints(points: readonly ArrayLike<number>[], logShare: number): Ellipsoid {
  const centre = meanOf(points);
  const n = centre.length;
  const covariance = covarianceOf(points, centre);
  const lower = factorRegular(covariance, n);
  const raw: Ellipsoid = { centre: [...centre], lower: [...lower], logVolume: logBall(n) + diagonalLog(lower, n) };
  let reach = 0;
  for (const point of points) reach = Math.max(reach, radius2(raw, point));
  const tight = grown(raw, Math.sqrt(reach || 1));
  const least = logShare + Math.log(points.length);
  return tight.logVolume >= least ? tight : grown(tight, Math.exp((least - tight.logVolume) / n));
}

function diagonalLog(lower: Float64Array, n: number): number {
  let sum = 0;
  for (let k = 0; k < n; k++) sum += Math.log(lower[k * n + k]);
  return sum;
}

/** Points that lie in a plane get a little thickness. */
function factorRegular(covariance: Float64Array, n: number): Float64Array {
  const trace = Array.from({ length: n }, (_, k) => covariance[k * n + k]).reduce((a, b) => a + b, 0);
  for (let part = 1e-12; ; part *= 100) {
    const thick = covariance.map((value, k) => (k % (n + 1) === 0 ? value + part * (trace / n || 1e-12) : value));
    const lower = factorCholesky(thick, n);
    if (lower) return lower;
  }
}

function splitPoints(points: readonly ArrayLike<number>[], logShare: number): Bound {
  const whole = aroundPoints(points, logShare);
  const n = points[0].length;
  const fewest = 2 * n + 2;
  // Nothing to gain where the points fill what they are in.
  if (points.length < 2 * fewest || whole.logVolume < logShare + Math.log(points.length) + 0.1) return [whole];
  const parts = twoMeans(points, whole);
  if (parts.some((part) => part.length < fewest)) return [whole];
  const split = parts.flatMap((part) => splitPoints(part, logShare));
  return boundLogVolume(split) < whole.logVolume + Math.log(splitGain) ? split : [whole];
}

/** Two-means on the ellipsoid's own scale, begun at the points farthest out along its longest spread. */
function twoMeans(points: readonly ArrayLike<number>[], whole: Ellipsoid): [ArrayLike<number>[], ArrayLike<number>[]] {
  const { centre, lower } = whole;
  const scaled = points.map((point) => solveLower(lower, Float64Array.from(point, (value, j) => value - centre[j])));
  // All variances are equal on this scale; mean |y_j| is largest where points stand in two groups.
  const n = centre.length;
  let [first, second] = [scaled[0], scaled[0]];
  let farthest = -1;
  for (let j = 0; j < n; j++) {
    const low = scaled.reduce((a, b) => (b[j] < a[j] ? b : a));
    const high = scaled.reduce((a, b) => (b[j] > a[j] ? b : a));
    const spread = scaled.reduce((sum, y) => sum + Math.abs(y[j]), 0);
    if (spread > farthest) [first, second, farthest] = [low, high, spread];
  }
  let sides: boolean[] = [];
  for (let round = 0; round < 50; round++) {
    const next = scaled.map((y) => distance2(y, second) < distance2(y, first));
    if (next.every((side, k) => side === sides[k])) break;
    sides = next;
    const [left, right] = [scaled.filter((_, k) => !sides[k]), scaled.filter((_, k) => sides[k])];
    if (left.length === 0 || right.length === 0) break;
    [first, second] = [meanOf(left), meanOf(right)];
  }
  return [points.filter((_, k) => !sides[k]), points.filter((_, k) => sides[k])];
}

function distance2(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let j = 0; j < a.length; j++) sum += (a[j] - b[j]) ** 2;
  return sum;
}
