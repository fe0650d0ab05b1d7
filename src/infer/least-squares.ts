import { differenceColumns } from './differences.ts';
import type { DifferenceSteps, ResidualFunction } from './differences.ts';
import { chiSquared } from './likelihood.ts';
import { dampedStep, inverseNormal, modelledFall, triangulate } from './qr.ts';
import type { Triangle } from './qr.ts';

export interface LeastSquaresOptions {
  /** Inclusive bounds; infinite where left out. */
  readonly lower?: Float64Array;
  readonly upper?: Float64Array;
  /** Columns of derivatives at `values`, where the residuals are `at`; finite differences where left out. */
  readonly jacobian?: (values: Float64Array, signal: AbortSignal | undefined, at: Float64Array) => Promise<Float64Array[]>;
  /** Finite differences: step over size, default 1e-6 (central: 1e-5). */
  readonly relativeStep?: number;
  readonly central?: boolean;
  /** Size of each parameter, for steps where a value is near 0; default: 1 for a value of 0. */
  readonly sizes?: Float64Array;
  /** Stop when chi2 falls, or a step moves, by less than this share; default 1e-10. */
  readonly tolerance?: number;
  /**
   * Stop when chi2 is predicted to fall, and falls, by less than this; or falls by less twice in a
   * row, as it does where derivatives are coarse. Default 0.
   */
  readonly resolution?: number;
  /** Default 200. */
  readonly maxIterations?: number;
  readonly onProgress?: (progress: LeastSquaresProgress) => void;
  readonly signal?: AbortSignal;
}

export interface LeastSquaresProgress {
  readonly iteration: number;
  readonly evaluations: number;
  readonly chi2: number;
  readonly values: Float64Array;
}

export interface LeastSquaresResult {
  readonly values: Float64Array;
  readonly chi2: number;
  readonly residuals: Float64Array;
  /**
   * Inverse of J^T J [row * n + column], for residuals in units of their own sigma; rows of
   * parameters held by a bound are 0. Undefined where the data do not determine all parameters.
   */
  readonly covariance?: Float64Array;
  /** Square roots of its diagonal; NaN where held by a bound or undetermined. */
  readonly errors: Float64Array;
  readonly atBound: readonly (false | 'lower' | 'upper')[];
  readonly converged: boolean;
  readonly reason: 'gradient' | 'step' | 'chi2' | 'iterations';
  readonly iterations: number;
  readonly evaluations: number;
}

/**
 * Least squares within bounds: Levenberg-Marquardt (Marquardt 1963) with Moré's (1978) scaling by
 * column norms, Nielsen's (1999) damping by the gain ratio, and an active set: a parameter that
 * would cross its bound is put on it and the step of the others solved again. Throws where the
 * start is out of bounds, its residuals or any derivatives are not finite, and the signal's reason when aborted.
 */
export async function leastSquares(
  residuals: ResidualFunction, start: Float64Array, options: LeastSquaresOptions = {},
): Promise<LeastSquaresResult> {
  const n = start.length;
  const { signal, tolerance = 1e-10, resolution = 0, maxIterations = 200 } = options;
  const steps = differenceSteps(start, options);
  const { lower, upper } = steps;
  start.forEach((value, j) => {
    if (!(value >= lower[j] && value <= upper[j])) throw new Error(`Start ${value} of parameter ${j + 1} is out of bounds.`);
  });
  let evaluations = 0;
  const evaluate: ResidualFunction = (values, stop) => {
    stop?.throwIfAborted();
    evaluations++;
    return residuals(values, stop);
  };
  const derivatives = (at: Float64Array, r: Float64Array): Promise<Float64Array[]> =>
    options.jacobian ? options.jacobian(at, signal, r) : differenceColumns(evaluate, at, r, steps, signal);

  let values = Float64Array.from(start);
  let r = await evaluate(values, signal);
  let chi2 = chiSquared(r);
  if (!Number.isFinite(chi2)) throw new Error('The residuals at the start are not finite.');
  const scale = new Float64Array(n);
  let damping = 1e-3;
  let growth = 2;
  let reason: LeastSquaresResult['reason'] | undefined;
  let iterations = 0;
  let stalled = 0;
  let local = linearise(await derivatives(values, r), r);
  while (!reason) {
    options.onProgress?.({ iteration: iterations, evaluations, chi2, values });
    local.norms.forEach((norm, j) => (scale[j] = Math.max(scale[j], norm)));
    const free = freeParameters(values, local.gradient, steps);
    const slope = Math.max(0, ...free.map((j) => Math.abs(local.gradient[j]) / (local.norms[j] || 1)));
    if (slope <= 1e-14 * Math.sqrt(chi2)) reason = 'gradient';
    // Try steps until one goes down.
    for (let accepted = false; !accepted && !reason; ) {
      signal?.throwIfAborted();
      const step = boundedStep(local.triangle, damping, scale, free, values, steps);
      const trial = values.map((value, j) => Math.min(upper[j], Math.max(lower[j], value + step[j])));
      const predicted = modelledFall(local.triangle, step);
      const there = await evaluate(trial, signal);
      const chi2There = chiSquared(there);
      const gain = predicted > 0 && Number.isFinite(chi2There) ? (chi2 - chi2There) / predicted : -1;
      const small = scaledNorm(step, scale) <= tolerance * scaledNorm(values, scale);
      const negligible = Math.max(tolerance * chi2, resolution);
      const flat = predicted <= negligible && Math.abs(chi2 - chi2There) <= negligible;
      if (gain > 1e-4) {
        stalled = chi2 - chi2There < resolution ? stalled + 1 : 0;
        accepted = true;
        values = trial;
        r = there;
        chi2 = chi2There;
        damping *= Math.max(1 / 3, 1 - (2 * gain - 1) ** 3);
        growth = 2;
      } else {
        damping *= growth;
        growth *= 2;
      }
      // Beyond any damping there is no step left to try.
      if (small || damping > 1e200) reason = 'step';
      else if (flat || stalled >= 2) reason = 'chi2';
    }
    iterations++;
    if (!reason && iterations >= maxIterations) reason = 'iterations';
    local = linearise(await derivatives(values, r), r);
  }

  const free = freeParameters(values, local.gradient, steps);
  const covariance = inverseNormal(local.triangle, free);
  return {
    values,
    chi2,
    residuals: r,
    covariance,
    errors: values.map((_, j) => (covariance && free.includes(j) ? Math.sqrt(covariance[j * n + j]) : NaN)),
    atBound: Array.from(values, (value, j) => (value <= lower[j] ? 'lower' : value >= upper[j] ? 'upper' : false)),
    converged: reason !== 'iterations',
    reason,
    iterations,
    evaluations,
  };
}

function differenceSteps(start: Float64Array, options: LeastSquaresOptions): DifferenceSteps {
  const central = options.central ?? false;
  return {
    central,
    relativeStep: options.relativeStep ?? (central ? 1e-5 : 1e-6),
    sizes: options.sizes ?? start.map((value) => Math.abs(value) || 1),
    lower: options.lower ?? start.map(() => -Infinity),
    upper: options.upper ?? start.map(() => Infinity),
  };
}

interface Linearised {
  readonly triangle: Triangle;
  /** J^T r. */
  readonly gradient: Float64Array;
  readonly norms: Float64Array;
}

/** Column norms, gradient and triangle of a Jacobian, whose columns are destroyed. */
function linearise(columns: Float64Array[], r: Float64Array): Linearised {
  const norms = Float64Array.from(columns, (column) => Math.sqrt(chiSquared(column)));
  const gradient = Float64Array.from(columns, (column) => column.reduce((sum, value, k) => sum + value * r[k], 0));
  const bad = norms.findIndex((norm) => !Number.isFinite(norm));
  if (bad >= 0) throw new Error(`The derivatives of parameter ${bad + 1} are not finite.`);
  return { norms, gradient, triangle: triangulate(columns, Float64Array.from(r)) };
}

/** Parameters not held by a bound that chi2 pushes them against. */
function freeParameters(values: Float64Array, gradient: Float64Array, { lower, upper }: DifferenceSteps): number[] {
  return Array.from(values.keys()).filter(
    (j) => !((values[j] <= lower[j] && gradient[j] >= 0) || (values[j] >= upper[j] && gradient[j] <= 0)),
  );
}

/** The damped step, with parameters that would cross a bound put on it and the others solved again. */
function boundedStep(
  triangle: Triangle, damping: number, scale: Float64Array, free: readonly number[], values: Float64Array,
  { lower, upper }: DifferenceSteps,
): Float64Array {
  const fixed = new Float64Array(values.length);
  let moving = [...free];
  for (;;) {
    const step = dampedStep(triangle, damping, scale, moving, fixed);
    const crossing = moving.filter((j) => values[j] + step[j] < lower[j] || values[j] + step[j] > upper[j]);
    if (crossing.length === 0) return step;
    for (const j of crossing) fixed[j] = (step[j] < 0 ? lower[j] : upper[j]) - values[j];
    moving = moving.filter((j) => !crossing.includes(j));
  }
}

function scaledNorm(values: Float64Array, scale: Float64Array): number {
  return Math.hypot(...values.map((value, j) => value * scale[j]));
}
