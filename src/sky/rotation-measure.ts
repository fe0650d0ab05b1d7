import { InputError } from '../units/input-error.ts';
import { weightedLine } from '../math/statistics.ts';
import type { WeightedLine } from '../math/statistics.ts';

/** chi = chi0 + RM lambda^2, fitted to one spectrum. Angles rad, RM rad m^-2. */
export interface RotationMeasure {
  readonly rm: number;
  readonly rmError: number;
  /** Angle at zero wavelength, north through east, in [0, pi). */
  readonly chi0: number;
  readonly chi0Error: number;
  /** NaN where the spectrum has no noise. */
  readonly chi2: number;
  readonly degreesOfFreedom: number;
  /** Weighted rms of the angles about the line, rad: tells also without noise where chi is no line. */
  readonly residual: number;
}

/** The wavelengths of a spectrum and the depths tried first; the same for every pixel of a map. */
export interface DepthSearch {
  readonly lambda2M2: Float64Array;
  /** Depths from -largest to largest, equally spaced. */
  readonly depths: Float64Array;
}

/**
 * Step of the coarse depths over 1/(range of lambda^2). A peak that falls midway between two of them
 * keeps cos(0.375) = 0.93 of its height at worst, more than the share below: none is missed.
 */
const depthStep = 0.75;
/** Depths whose coherence is this share of the best are all fitted. */
const candidateShare = 0.9;
/** The n of n pi settle in two or three rounds. */
const mostIterations = 20;
/** Unless the caller asks for more, depths beyond this are not tried, rad m^-2. */
const farthestDepth = 1e4;

/**
 * The search for a set of wavelengths (m^2, any order). `largestDepth` (rad m^-2) defaults to where
 * the closest pair of wavelengths becomes ambiguous, pi/(2 delta lambda^2), but at most 1e4.
 * Throws InputError where there are fewer than two distinct wavelengths.
 */
export function depthSearch(lambda2M2: ArrayLike<number>, largestDepth?: number): DepthSearch {
  const sorted = Float64Array.from(lambda2M2).sort();
  const span = sorted[sorted.length - 1] - sorted[0];
  if (!(span > 1e-9 * sorted[0])) {
    throw new InputError('a rotation measure needs at least two wavelengths; the maps have one');
  }
  let closest = span;
  for (let k = 1; k < sorted.length; k++) {
    const gap = sorted[k] - sorted[k - 1];
    if (gap > 1e-9 * sorted[k]) closest = Math.min(closest, gap);
  }
  const largest = largestDepth ?? Math.min(Math.PI / (2 * closest), farthestDepth);
  const count = 2 * Math.max(1, Math.ceil((largest * span) / depthStep)) + 1;
  const depths = Float64Array.from({ length: count }, (_, j) => largest * ((2 * j) / (count - 1) - 1));
  return { lambda2M2: Float64Array.from(lambda2M2), depths };
}

/**
 * Fits chi(lambda^2) to one spectrum with weights 4 P^2/sigma^2 (all sigma zero: P^2, errors 0) and
 * n pi ambiguities solved: the depths at which |sum w e^{2i(chi - RM lambda^2)}| is near its largest
 * are refined by least squares on the wrapped residuals; the lowest chi^2 wins, and among equals the
 * smallest |RM|. Blank (NaN) channels are left out. Undefined where fewer than two wavelengths, or no
 * polarization, are left.
 */
export function fitRotationMeasure(
  search: DepthSearch,
  Q: ArrayLike<number>,
  U: ArrayLike<number>,
  sigma: ArrayLike<number>,
): RotationMeasure | undefined {
  const spectrum = angleSpectrum(search.lambda2M2, Q, U, sigma);
  if (!spectrum) return undefined;
  let best: WeightedLine | undefined;
  for (const depth of candidateDepths(search.depths, spectrum)) {
    const line = refine(spectrum, depth);
    if (!best || isBetter(line, best, spectrum.total)) best = line;
  }
  if (!best || !Number.isFinite(best.slope)) return undefined;
  return {
    rm: best.slope,
    rmError: spectrum.noisy ? best.slopeError : 0,
    chi0: ((best.intercept % Math.PI) + Math.PI) % Math.PI,
    chi0Error: spectrum.noisy ? best.interceptError : 0,
    chi2: spectrum.noisy ? best.chi2 : NaN,
    degreesOfFreedom: spectrum.chi.length - 2,
    residual: Math.sqrt(best.chi2 / spectrum.total),
  };
}

interface AngleSpectrum {
  readonly lambda2: number[];
  readonly chi: number[];
  readonly weights: number[];
  readonly total: number;
  readonly noisy: boolean;
}

function angleSpectrum(
  lambda2M2: Float64Array,
  Q: ArrayLike<number>,
  U: ArrayLike<number>,
  sigma: ArrayLike<number>,
): AngleSpectrum | undefined {
  const [lambda2, chi, weights]: [number[], number[], number[]] = [[], [], []];
  let total = 0;
  let noisy = false;
  for (let k = 0; k < lambda2M2.length; k++) {
    const squared = Q[k] * Q[k] + U[k] * U[k];
    if (!(squared > 0)) continue;
    const weight = (4 * squared) / (sigma[k] > 0 ? sigma[k] ** 2 : 1);
    noisy ||= sigma[k] > 0;
    lambda2.push(lambda2M2[k]);
    chi.push(Math.atan2(U[k], Q[k]) / 2);
    weights.push(weight);
    total += weight;
  }
  const distinct = lambda2.some((value) => Math.abs(value - lambda2[0]) > 1e-9 * value);
  return distinct ? { lambda2, chi, weights, total, noisy } : undefined;
}

/** The coarse depths at local maxima of the coherence that come near its largest. */
function candidateDepths(depths: Float64Array, { lambda2, chi, weights }: AngleSpectrum): number[] {
  const re = new Float64Array(depths.length);
  const im = new Float64Array(depths.length);
  const step = depths[1] - depths[0];
  for (let k = 0; k < chi.length; k++) {
    const start = 2 * (chi[k] - depths[0] * lambda2[k]);
    let [x, y] = [weights[k] * Math.cos(start), weights[k] * Math.sin(start)];
    const [cos, sin] = [Math.cos(2 * step * lambda2[k]), -Math.sin(2 * step * lambda2[k])];
    for (let j = 0; j < depths.length; j++) {
      re[j] += x;
      im[j] += y;
      const turned = x * cos - y * sin;
      y = x * sin + y * cos;
      x = turned;
    }
  }
  // Squares of the coherence compare as well, without a root for each depth.
  let largest = 0;
  for (let j = 0; j < depths.length; j++) {
    re[j] = re[j] * re[j] + im[j] * im[j];
    if (re[j] > largest) largest = re[j];
  }
  const candidates: number[] = [];
  for (let j = 0; j < depths.length; j++) {
    if (re[j] < candidateShare ** 2 * largest) continue;
    if (!(re[j - 1] > re[j]) && !(re[j + 1] > re[j])) candidates.push(depths[j]);
  }
  return candidates;
}

/** Least squares on the angles less n pi, each nearest to the line found so far, until no n changes. */
function refine({ lambda2, chi, weights }: AngleSpectrum, depth: number): WeightedLine {
  const start = angleAtZero(lambda2, chi, weights, depth);
  let line: WeightedLine = { intercept: start, slope: depth, interceptError: NaN, slopeError: NaN, chi2: NaN };
  let unwrapped: number[] = [];
  for (let iteration = 0; iteration < mostIterations; iteration++) {
    const { intercept, slope } = line;
    const next = chi.map((angle, k) => {
      const turns = (angle - intercept - slope * lambda2[k]) / Math.PI;
      return angle - Math.PI * Math.round(turns);
    });
    if (next.every((angle, k) => angle === unwrapped[k])) break;
    unwrapped = next;
    line = weightedLine(lambda2, unwrapped, weights);
  }
  return line;
}

function angleAtZero(lambda2: number[], chi: number[], weights: number[], depth: number): number {
  let re = 0;
  let im = 0;
  chi.forEach((angle, k) => {
    re += weights[k] * Math.cos(2 * (angle - depth * lambda2[k]));
    im += weights[k] * Math.sin(2 * (angle - depth * lambda2[k]));
  });
  return Math.atan2(im, re) / 2;
}

/** Lower chi^2; where two are equal to rounding, as with two wavelengths, the smaller |RM|. */
function isBetter(line: WeightedLine, best: WeightedLine, total: number): boolean {
  const difference = line.chi2 - best.chi2;
  if (Math.abs(difference) <= 1e-12 * total) return Math.abs(line.slope) < Math.abs(best.slope);
  return difference < 0;
}
