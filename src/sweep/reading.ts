import { gridSensitivity, SensitivityTally, type SensitivityIndex } from '../math/sensitivity.ts';
import { pointsPerVariant, type SweepPoint } from './design.ts';
import { columnsOf } from './evaluate.ts';
import { familiesOf, levelsOf, type AxisLevels, type Families } from './levels.ts';
import type { SweepColumn } from './measures.ts';
import type { SweepPlan } from './types.ts';

/** Count, mean and spread of a column's values that fell into cells, gathered one by one (Welford 1962). */
export class CellMoments {
  readonly count: Float64Array;
  readonly mean: Float64Array;
  private readonly squares: Float64Array;

  constructor(cells: number) {
    this.count = new Float64Array(cells);
    this.mean = new Float64Array(cells).fill(NaN);
    this.squares = new Float64Array(cells);
  }

  add(cell: number, value: number): void {
    if (Number.isNaN(value)) return;
    const before = this.count[cell] > 0 ? this.mean[cell] : 0;
    const off = value - before;
    this.mean[cell] = before + off / ++this.count[cell];
    this.squares[cell] += off * (value - this.mean[cell]);
  }

  /** Standard deviation of what fell into a cell (n); 0 of one value, NaN of none. */
  scatter(cell: number): number {
    return this.count[cell] > 0 ? Math.sqrt(this.squares[cell] / this.count[cell]) : NaN;
  }
}

/** One column against one axis: a curve a family, [family][level]. */
export interface SweepCurves {
  readonly axis: number;
  readonly levels: AxisLevels;
  readonly families: Families;
  /** By column, cells = family x levels + level. */
  readonly moments: readonly CellMoments[];
}

/** Columns over two axes, one picture a variant. */
export interface SweepHeat {
  readonly axes: readonly [number, number];
  readonly levels: readonly [AxisLevels, AxisLevels];
  /** By column, cells = (variant x first levels + first) x second levels + second. */
  readonly moments: readonly CellMoments[];
}

/** What each axis explains of a column's variance, in one variant. */
export interface SweepImportance {
  readonly variant: number;
  readonly column: number;
  readonly indices: readonly SensitivityIndex[];
}

/** The columns worth drawing, those of one kind beside each other whatever their band. */
export function drawnColumns(columns: readonly SweepColumn[]): number[] {
  const kind = (k: number): string => columns[k].label.split(',')[0];
  const drawn = columns.flatMap(({ drawn: isDrawn }, k) => (isDrawn ? [k] : []));
  const kinds = [...new Set(drawn.map(kind))];
  return kinds.flatMap((one) => drawn.filter((k) => kind(k) === one));
}

/** Values of a full grid kept for its analysis of variance, all columns together. */
const mostGridValues = 4e6;

/** Sums up a sweep's rows, given in their order, in memory that does not grow with their number. */
export class SweepReading {
  readonly columns: readonly SweepColumn[];
  readonly curves: readonly SweepCurves[];
  readonly heat: SweepHeat | undefined;
  private readonly per: number;
  private readonly tallies: readonly (readonly SensitivityTally[])[];
  private readonly grids: readonly (readonly CellMoments[])[];
  private readonly sample: CellMoments[];

  constructor(private readonly plan: SweepPlan) {
    this.columns = columnsOf(plan);
    this.per = pointsPerVariant(plan);
    const moments = (cells: number): CellMoments[] => this.columns.map(() => new CellMoments(cells));
    this.curves = plan.axes.map((_, axis) => {
      const [levels, families] = [levelsOf(plan, axis), familiesOf(plan, axis)];
      return { axis, levels, families, moments: moments(levels.middles.length * families.names.length) };
    });
    if (plan.heatMap) {
      const levels = [levelsOf(plan, plan.heatMap[0]), levelsOf(plan, plan.heatMap[1])] as const;
      this.heat = { axes: plan.heatMap, levels, moments: moments(plan.variants.length * levels[0].middles.length * levels[1].middles.length) };
    }
    const each = <T>(make: () => T): T[][] => plan.variants.map(() => this.columns.map(make));
    const d = plan.axes.length;
    this.tallies = plan.design === 'sensitivity' ? each(() => new SensitivityTally(d, plan.samples)) : [];
    const isGrid = plan.design === 'grid' && d > 1 && this.per * plan.variants.length * this.columns.length <= mostGridValues;
    this.grids = isGrid ? each(() => new CellMoments(this.per)) : [];
    this.sample = plan.design === 'sensitivity' ? moments(d + 2) : [];
  }

  /** Takes the next row. */
  add(row: number, at: SweepPoint, values: ArrayLike<number>): void {
    const realisations = Math.max(1, this.plan.realisations);
    const point = Math.floor(row / realisations);
    for (const { levels, families, moments } of this.curves) {
      const cell = families.familyOf(at) * levels.middles.length + levels.levelOf(point, at);
      moments.forEach((one, k) => one.add(cell, values[k]));
    }
    if (this.heat) {
      const [first, second] = this.heat.levels;
      const cell = (at.variant * first.middles.length + first.levelOf(point, at)) * second.middles.length + second.levelOf(point, at);
      this.heat.moments.forEach((one, k) => one.add(cell, values[k]));
    }
    this.grids[at.variant]?.forEach((one, k) => one.add(point % this.per, values[k]));
    if (this.tallies.length > 0) this.addToSample(point, row % realisations === realisations - 1, at.variant, values);
  }

  /** Indices of every drawn column and variant; none for a plain Sobol design or a grid too large to be kept. */
  importance(): SweepImportance[] {
    const steps = this.plan.axes.map((axis) => axis.values.length);
    const drawn = drawnColumns(this.columns);
    return this.plan.variants.flatMap((_, variant) =>
      drawn.flatMap((column): SweepImportance[] => {
        if (this.tallies.length > 0) return [{ variant, column, indices: this.tallies[variant][column].indices() }];
        if (this.grids.length > 0) return [{ variant, column, indices: gridSensitivity(this.grids[variant][column].mean, steps) }];
        return [];
      }),
    );
  }

  /** Realisations of a point are averaged; d + 2 points make a sample. */
  private addToSample(point: number, isLastRealisation: boolean, variant: number, values: ArrayLike<number>): void {
    const size = this.plan.axes.length + 2;
    const place = (point % this.per) % size;
    this.sample.forEach((one, k) => one.add(place, values[k]));
    if (!isLastRealisation || place !== size - 1) return;
    this.sample.forEach((one, k) => this.tallies[variant][k].add(one.mean));
    for (let k = 0; k < this.sample.length; k++) this.sample[k] = new CellMoments(size);
  }
}
