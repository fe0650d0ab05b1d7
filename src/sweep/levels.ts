import { convertQuantity, displayUnit } from '../units/quantity.ts';
import { between } from './axis.ts';
import { gridSteps, pointsPerVariant, type SweepPoint } from './design.ts';
import type { SweepAxis, SweepPlan } from './types.ts';

/** Steps of an axis beyond which neighbours share a level; levels of a random design's range. */
const mostLevels = 60;
const randomLevels = 20;

/** The levels at which what was measured is summed up along one axis. */
export interface AxisLevels {
  /** Middle of every level, in the axis's unit. */
  readonly middles: readonly number[];
  /** The level of a point. */
  levelOf(point: number, at: SweepPoint): number;
}

/** Levels of an axis: its values, or equal parts of its range where there are too many or they are random. */
export function levelsOf(plan: SweepPlan, index: number): AxisLevels {
  const axis = plan.axes[index];
  const { values, spacing } = axis;
  const per = pointsPerVariant(plan);
  if (plan.design === 'grid') {
    const together = Math.ceil(values.length / mostLevels);
    const middles = Array.from({ length: Math.ceil(values.length / together) }, (_, k) => {
      const part = values.slice(k * together, (k + 1) * together);
      return part.reduce((sum, value) => sum + value, 0) / part.length;
    });
    return { middles, levelOf: (point) => Math.floor(gridSteps(plan.axes, point % per)[index] / together) };
  }
  if (spacing === 'list') {
    const place = new Map(values.map((value, k) => [value, k]));
    return { middles: values, levelOf: (_, at) => place.get(at.values[index]) ?? -1 };
  }
  const middles = Array.from({ length: randomLevels }, (_, k) => between(values[0], values[1], spacing, (k + 0.5) / randomLevels));
  return { middles, levelOf: (_, at) => Math.min(randomLevels - 1, Math.max(0, Math.floor(randomLevels * shareOf(axis, at.values[index])))) };
}

/** How far along its range a value lies, in the range's own spacing. */
export function shareOf({ values, spacing }: SweepAxis, value: number): number {
  const [from, to] = [values[0], values[values.length - 1]];
  const scaled = spacing === 'log' ? Math.log : spacing === 'cos' ? Math.cos : (x: number): number => x;
  return (scaled(value) - scaled(from)) / (scaled(to) - scaled(from));
}

/** Curves drawn apart: one a variant and value of the other listed quantities, as far as they are few. */
export interface Families {
  readonly names: readonly string[];
  familyOf(at: SweepPoint): number;
}

const mostFamilies = 6;

/** The families of curves against one axis (or against none, -1: the variants). */
export function familiesOf(plan: SweepPlan, axis: number): Families {
  const lists = plan.axes.flatMap((one, k) => (k !== axis && axis >= 0 && one.spacing === 'list' ? [k] : []));
  const count = lists.reduce((product, k) => product * plan.axes[k].values.length, plan.variants.length);
  const parted = count <= mostFamilies ? lists : [];
  const apart = plan.variants.length * parted.reduce((product, k) => product * plan.axes[k].values.length, 1) <= mostFamilies || axis < 0;
  if (!apart) return { names: [''], familyOf: () => 0 };
  const names = plan.variants.flatMap(({ name }) =>
    parted.reduce<string[]>(
      (sofar, k) => sofar.flatMap((one) => plan.axes[k].values.map((value) => [one, `${shortName(plan.axes[k].path)} ${valueText(plan.axes[k], value)}`].filter(Boolean).join(', '))),
      [plan.variants.length > 1 ? name : ''],
    ),
  );
  return {
    names,
    familyOf: ({ variant, values }) => parted.reduce((family, k) => family * plan.axes[k].values.length + plan.axes[k].values.indexOf(values[k]), variant),
  };
}

/** The last word of a path, with the component's name before it where there is one: `inclination`, `halo core`. */
export function shortName(path: string): string {
  const parts = path.split('.');
  return parts.length > 2 ? parts.slice(-2).join(' ') : parts[parts.length - 1];
}

/** A value of an axis in its shown unit, three digits; degrees have their sign. */
export function valueText({ unit, shownUnit }: Pick<SweepAxis, 'unit' | 'shownUnit'>, value: number): string {
  const number = Number(convertQuantity(value, unit, shownUnit).toPrecision(3));
  return shownUnit === 'deg' ? `${number}°` : `${number} ${displayUnit(shownUnit)}`.trim();
}
