import { drawnColumns, type SweepCurves, type SweepReading } from '../sweep/reading.ts';
import type { SweepPlan } from '../sweep/types.ts';
import { drawLegend, linePlot, type PlotSeries } from './line-plot.ts';
import { panelGrid, type TitledDrawing } from './panel-grid.ts';
import { axisLabel, plottedAxis } from './sweep-axis.ts';
import type { Drawing } from './svg.ts';
import { hypothesisStyle, type Theme } from './theme.ts';

const PANEL = { width: 352, height: 218 };
const COLUMNS = 3;

/** Every drawn measure against one varied quantity, a curve a family, each with its band. */
export function sweepCurves(plan: SweepPlan, reading: SweepReading, curves: SweepCurves, theme: Theme): Drawing {
  const about = plan.axes[curves.axis];
  const { at, axis } = plottedAxis(about);
  const x = curves.levels.middles.map(at);
  const names = curves.families.names;
  const styles = names.map((_, f) => hypothesisStyle(f, theme));
  const panels = drawnColumns(reading.columns).map((column): TitledDrawing => {
    const { label, unit } = reading.columns[column];
    const series = names.flatMap((_, f): PlotSeries[] => {
      const { y, band } = curveOf(reading, curves, column, f);
      if (!y.some(Number.isFinite)) return [];
      const line: PlotSeries = { label: '', draw: 'line', x, y, error: band, ...styles[f] };
      return about.spacing === 'list' || y.filter(Number.isFinite).length === 1 ? [line, { ...line, draw: 'points', error: undefined }] : [line];
    });
    const limit = /^significance_/.test(reading.columns[column].name) && axis.domain ? [thresholdLine(plan.threshold, axis.domain, theme)] : [];
    return { title: label, drawing: linePlot({ series: [...series, ...limit], x: axis, y: { label: '', unit }, ...PANEL, theme }) };
  });
  const legend = names.length > 1 ? drawLegend(names.map((name, f) => ({ label: name, draw: 'line', x: [], y: [], ...styles[f] })), COLUMNS * PANEL.width, theme) : undefined;
  return panelGrid(panels, COLUMNS, `Against ${axisLabel(about)}`, legend);
}

/** Mean of a family at every level; its band is the scatter over all else that was varied, or, of single values, their standard error. */
export function curveOf(reading: SweepReading, { levels, moments }: SweepCurves, column: number, family: number): { readonly y: number[]; readonly band: number[] } {
  const count = levels.middles.length;
  const errorColumn = reading.columns.findIndex(({ name }) => name === reading.columns[column].error);
  const cells = Array.from({ length: count }, (_, k) => family * count + k);
  const own = moments[column];
  const single = cells.every((cell) => own.count[cell] <= 1);
  return {
    y: cells.map((cell) => own.mean[cell]),
    band: cells.map((cell) => (single && errorColumn >= 0 ? moments[errorColumn].mean[cell] : own.scatter(cell))),
  };
}

function thresholdLine(threshold: number, domain: readonly [number, number], theme: Theme): PlotSeries {
  return { label: '', draw: 'line', x: [...domain], y: [threshold, threshold], colour: theme.soft, dash: '3 3' };
}
