import { shortName, valueText } from './levels.ts';
import type { SweepCurves, SweepReading } from './reading.ts';
import type { SweepPlan } from './types.ts';

/** Where along an axis the mean of a column lies above a threshold. */
export interface Crossing {
  readonly column: number;
  readonly axis: number;
  readonly family: string;
  /** From and to in the axis's unit; an end of undefined is the end of what was computed. */
  readonly intervals: readonly (readonly [number | undefined, number | undefined])[];
  /** As a sentence. */
  readonly sentence: string;
}

/**
 * Where x is such that y > threshold, by straight lines between neighbouring known values; blanks end
 * an interval. An end of undefined: y is above up to the last known value.
 */
export function intervalsAbove(x: ArrayLike<number>, y: ArrayLike<number>, threshold: number): (readonly [number | undefined, number | undefined])[] {
  const found: [number | undefined, number | undefined][] = [];
  let open: [number | undefined, number | undefined] | undefined;
  let before = NaN;
  for (let k = 0; k < y.length; k++) {
    const above = y[k] > threshold;
    const at = k > 0 && !Number.isNaN(before) && !Number.isNaN(y[k]) ? x[k - 1] + ((threshold - before) / (y[k] - before)) * (x[k] - x[k - 1]) : undefined;
    if (above && !open) found.push((open = [at, undefined]));
    if (!above && open) {
      open[1] = at;
      open = undefined;
    }
    before = y[k];
  }
  return found;
}

/** For every significance that was measured, against every axis and family: where it exceeds the sweep's threshold. */
export function findCrossings(plan: SweepPlan, reading: SweepReading): Crossing[] {
  const { columns } = reading;
  return columns.flatMap(({ significance, label }) => {
    const column = columns.findIndex(({ name }) => name === significance);
    if (column < 0) return [];
    return reading.curves.flatMap((curves) => curves.families.names.map((family, f) => crossingOf(plan, curves, column, family, f, label)));
  });
}

function crossingOf(plan: SweepPlan, { axis, levels, moments }: SweepCurves, column: number, family: string, f: number, label: string): Crossing {
  const { middles } = levels;
  const count = middles.length;
  const y = moments[column].mean.subarray(f * count, (f + 1) * count);
  const about = plan.axes[axis];
  const name = shortName(about.path);
  const subject = `${family === '' ? 'the' : `${family}: the`} ${label.replace(', ', ' at ')}`;
  const text = (value: number): string => valueText(about, value);
  const known = middles.filter((_, k) => !Number.isNaN(y[k]));
  const full = { column, axis, family };
  if (known.length === 0) return { ...full, intervals: [], sentence: `${subject} cannot be told at any ${name}.` };
  const reach = known.length > 1 ? `from ${text(known[0])} to ${text(known[known.length - 1])}` : `at ${text(known[0])}`;
  if (about.spacing === 'list') {
    const above = middles.filter((_, k) => y[k] > plan.threshold);
    const where = above.length === 0 ? `stays below ${plan.threshold}σ for ${name} = ${middles.map(text).join(', ')}` : `exceeds ${plan.threshold}σ for ${name} = ${above.map(text).join(', ')}${above.length === middles.length ? ' (all)' : ''}`;
    return { ...full, intervals: above.map((value) => [value, value] as const), sentence: `${subject} ${where}.` };
  }
  const intervals = intervalsAbove(middles, y, plan.threshold);
  if (intervals.length === 0) return { ...full, intervals, sentence: `${subject} stays below ${plan.threshold}σ for ${name} ${reach}.` };
  const parts = intervals.map(([low, high]) => {
    if (low === undefined && high === undefined) return `${name} ${reach}, everywhere`;
    if (low === undefined) return `${name} < ${text(high as number)}`;
    return high === undefined ? `${name} > ${text(low)}` : `${text(low)} < ${name} < ${text(high)}`;
  });
  return { ...full, intervals, sentence: `${subject} exceeds ${plan.threshold}σ for ${parts.join(' and for ')}.` };
}
