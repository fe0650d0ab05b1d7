import { factorShifted, solveBandedLu } from '../../math/banded-lu.ts';
import type { SparseMatrix } from '../../math/sparse.ts';
import { addAlphaTerms, linearMatrix, withEntries, type DynamoOperator } from './operator.ts';
import { noPause, type Pause } from './pause.ts';
import { preparePoloidal, quenchAlpha, quenchedRate, type PoloidalOf, type QuenchedAlpha } from './quench.ts';
import { nodeField } from './unknowns.ts';

/** The field once alpha is quenched: steady, or repeating after a period. */
export interface SaturatedField {
  readonly x: Float64Array;
  /** undefined: steady. kpc s/km. */
  readonly period?: number;
  /** Model time from the seed until the field was saturated, kpc s/km; 0 where it started so. */
  readonly time: number;
}

/** The field grew neither steady nor periodic in the time given. */
export class NotSaturated extends Error {}

/** Change of the field within one e-folding time of the fastest mode below which it may be steady. */
const steadyChange = 2e-3;
/** e-folding times of the fastest mode after which the march is given up. */
const longestMarch = 400;
/** Newton's corrections of a steady field end below this share of the largest value. */
const steadyError = 1e-8;
const mostCorrections = 25;
/** Steps in the shortest time of interest. */
const stepsPerRate = 5;

/**
 * Follows the quenched equations from a seed until the field is steady or periodic. Rotation, wind and
 * diffusion are implicit, alpha explicit (two-step backward differences, second order; Ascher, Ruuth &
 * Wetton 1995); what looks steady is then solved for by Newton's method. `growthRate` is that of the
 * fastest mode, `rate` bounds the rates that matter; both per kpc s/km. Throws NotSaturated.
 */
export async function saturate(operator: DynamoOperator, seed: Float64Array, growthRate: number, rate: number, pause: Pause = noPause): Promise<SaturatedField> {
  const step = 1 / (stepsPerRate * rate);
  const factors = factorShifted(operator.motion, 1.5, -step);
  const poloidalOf = preparePoloidal(operator);
  const alphaRate = (x: Float64Array): Float64Array => {
    const field = nodeField(operator.unknowns, x);
    const sum = new Float64Array(x.length);
    addAlphaTerms(operator.alphaTerms, quenchAlpha(operator, field, poloidalOf(field.potential)).alpha, x, sum);
    return sum;
  };
  const perCheck = Math.max(4, Math.ceil(1 / (growthRate * step)));
  const last = Math.ceil(longestMarch / (growthRate * step));
  const record = new OscillationRecord(operator, step);
  let [before, now] = [seed, seed];
  let [rateBefore, rateNow] = [alphaRate(seed), alphaRate(seed)];
  let reference = seed;
  for (let k = 1; k <= last; k++) {
    const right = now.map((value, i) => 2 * value - 0.5 * before[i] + step * (2 * rateNow[i] - rateBefore[i]));
    [before, now] = [now, solveBandedLu(factors, right)];
    [rateBefore, rateNow] = [rateNow, alphaRate(now)];
    record.add(now);
    if (k % 8 === 0) await pause('following the field to saturation', Math.min(k, last), last);
    if (k % perCheck !== 0) continue;
    if (largestDifference(now, reference) < steadyChange * largest(now)) {
      const steady = polishSteady(operator, now, poloidalOf);
      // A far jump means that the field was still on its way.
      if (steady && largestDifference(steady, now) < 0.1 * largest(now)) return { x: steady, time: k * step };
    }
    const period = record.findPeriod();
    if (period !== undefined) return { x: record.fieldAtLargest(), period, time: k * step };
    reference = now;
  }
  throw new NotSaturated(`the field is neither steady nor periodic after ${longestMarch} e-folding times of its fastest mode`);
}

/** The steady field near a given one by Newton's method, undefined where it does not settle. */
export function polishSteady(operator: DynamoOperator, start: Float64Array, poloidalOf: PoloidalOf = preparePoloidal(operator)): Float64Array | undefined {
  let x = start;
  let previous = Infinity;
  for (let k = 0; k < mostCorrections; k++) {
    const { rate, quenched } = quenchedRate(operator, poloidalOf, x);
    const correction = solveBandedLu(factorShifted(newtonMatrix(operator, quenched, x), 0, -1), rate);
    const size = largest(correction) / largest(x);
    if (!(size < 2 * previous) || !(size < 1)) return undefined;
    x = x.map((value, i) => value + correction[i]);
    if (size < steadyError) return x;
    previous = size;
  }
  return undefined;
}

/** The equations' slope at a field; how alpha depends on the poloidal part, the smaller one, is left out of it. */
function newtonMatrix(operator: DynamoOperator, { alpha, slope }: QuenchedAlpha, x: Float64Array): SparseMatrix {
  const { rows, columns, coefficients, first, second } = operator.alphaTerms;
  const { azimuthal } = operator.unknowns;
  const count = rows.length;
  const [allRows, allColumns, values] = [new Int32Array(2 * count), new Int32Array(2 * count), new Float64Array(2 * count)];
  let used = 0;
  for (let k = 0; k < count; k++) {
    for (const node of [first[k], second[k]]) {
      if (azimuthal[node] < 0 || slope[node] === 0) continue;
      allRows[used] = rows[k];
      allColumns[used] = azimuthal[node];
      values[used++] = 0.5 * coefficients[k] * slope[node] * x[columns[k]];
    }
  }
  return withEntries(linearMatrix(operator, alpha), x.length, allRows.subarray(0, used), allColumns.subarray(0, used), values.subarray(0, used));
}

/** Watches the azimuthal field where it is strongest for a repetition. */
class OscillationRecord {
  private probe = -1;
  private strongest = 0;
  private strongestField: Float64Array = new Float64Array(0);
  private values: number[] = [];

  constructor(
    private readonly operator: DynamoOperator,
    private readonly step: number,
  ) {}

  add(x: Float64Array): void {
    if (this.probe < 0) this.probe = this.operator.unknowns.azimuthal.reduce((best, place) => (place >= 0 && (best < 0 || Math.abs(x[place]) > Math.abs(x[best])) ? place : best), -1);
    const value = x[this.probe];
    this.values.push(value);
    // The strongest moment of the last stretch stands for the whole cycle.
    if (Math.abs(value) >= this.strongest) [this.strongest, this.strongestField] = [Math.abs(value), x];
  }

  fieldAtLargest(): Float64Array {
    return this.strongestField;
  }

  /** The time between upward zero crossings where the last four agree in length and height. */
  findPeriod(): number | undefined {
    const crossings: number[] = [];
    const peaks: number[] = [];
    let peak = 0;
    for (let k = 1; k < this.values.length; k++) {
      const [a, b] = [this.values[k - 1], this.values[k]];
      peak = Math.max(peak, b);
      if (!(a < 0 && b >= 0)) continue;
      crossings.push(k - 1 + a / (a - b));
      peaks.push(peak);
      peak = 0;
    }
    if (crossings.length < 5) return undefined;
    const lengths = crossings.slice(-4).map((at, k) => at - crossings[crossings.length - 5 + k]);
    const heights = peaks.slice(-4);
    if (spread(lengths) > 0.01 || spread(heights) > 0.01) {
      // Not yet: earlier, stronger moments must not stand for the cycle.
      this.strongest *= 0.9;
      return undefined;
    }
    return (lengths.reduce((sum, length) => sum + length, 0) / lengths.length) * this.step;
  }
}

function spread(values: readonly number[]): number {
  return (Math.max(...values) - Math.min(...values)) / Math.max(...values.map(Math.abs));
}

function largest(x: Float64Array): number {
  return x.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
}

function largestDifference(a: Float64Array, b: Float64Array): number {
  return a.reduce((most, value, k) => Math.max(most, Math.abs(value - b[k])), 0);
}
