import { between } from '../sweep/axis.ts';
import { shortName, valueText } from '../sweep/levels.ts';
import { shownValue } from '../sweep/table.ts';
import type { SweepAxis } from '../sweep/types.ts';
import { displayUnit } from '../units/quantity.ts';
import type { PlotAxis } from './line-plot.ts';

/** Where values of a varied quantity lie along a plot, and its axis. */
export interface PlottedAxis {
  at(value: number): number;
  readonly axis: PlotAxis;
}

/** A varied quantity along a plot: in its shown unit, or by its logarithm where it is spaced so. */
export function plottedAxis(about: SweepAxis): PlottedAxis {
  const { unit, shownUnit, spacing, values } = about;
  const shown = (value: number): number => shownValue(value, unit, shownUnit);
  const label = axisLabel(about);
  const ends = [values[0], values[values.length - 1]] as const;
  if (spacing !== 'log') {
    const places = values.map(shown);
    const [low, high] = [Math.min(...places), Math.max(...places)];
    const room = spacing === 'list' || low === high ? (high - low || Math.abs(low) || 1) / 20 : 0;
    return { at: shown, axis: { label, domain: [low - room, high + room] } };
  }
  const at = (value: number): number => Math.log10(shown(value));
  return { at, axis: { label, domain: [at(ends[0]), at(ends[1])], ticks: logTicks(shown(ends[0]), shown(ends[1])) } };
}

/** Name and unit of a varied quantity. */
export function axisLabel({ path, shownUnit }: SweepAxis): string {
  return shownUnit === '' ? shortName(path) : `${shortName(path)} (${displayUnit(shownUnit)})`;
}

/** What varies and over what, in words: `0° to 85°, 18 steps`. */
export function rangeText(axis: SweepAxis, isGrid: boolean): string {
  const { values, spacing } = axis;
  if (spacing === 'list') return values.map((value) => valueText(axis, value)).join(', ');
  const ends = `${valueText(axis, values[0])} to ${valueText(axis, values[values.length - 1])}`;
  const spaced = spacing === 'linear' ? '' : `, equal steps of ${spacing === 'log' ? 'its logarithm' : 'its cosine'}`;
  return isGrid ? `${ends}, ${values.length} values${spaced}` : `${ends}, at random${spaced}`;
}

/** 1, 2 and 5 times powers of ten; more where a range is short. */
function logTicks(low: number, high: number): { value: number; label: string }[] {
  const [first, last] = [Math.floor(Math.log10(low)), Math.ceil(Math.log10(high))];
  const decades = Math.log10(high / low);
  const times = decades > 4 ? [1] : [1, 2, 5];
  const inside: number[] = [];
  for (let power = first; power <= last; power++) for (const time of times) inside.push(time * 10 ** power);
  const ticks = inside.filter((value) => value >= low * (1 - 1e-9) && value <= high * (1 + 1e-9));
  const shown = ticks.length >= 2 ? ticks : [0, 0.5, 1].map((share) => between(low, high, 'log', share));
  return shown.map((value) => ({ value: Math.log10(value), label: String(Number(value.toPrecision(3))) }));
}
