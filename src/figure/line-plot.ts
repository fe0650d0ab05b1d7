import { line } from 'd3-shape';
import { shownUnit } from './number-text.ts';
import { clipped, element, fixed, moved, polyline, textElement, textWidth } from './svg.ts';
import type { Drawing } from './svg.ts';
import type { Theme } from './theme.ts';
import { tidyTicks } from './ticks.ts';
import type { Tick } from './ticks.ts';

/** One curve or set of points; arrays of equal length, NaN leaves a gap. */
export interface PlotSeries {
  readonly label: string;
  readonly draw: 'line' | 'points';
  readonly x: ArrayLike<number>;
  readonly y: ArrayLike<number>;
  /** One standard deviation of y, drawn as a bar (points) or a pale band (line). */
  readonly error?: ArrayLike<number>;
  readonly colour: string;
  readonly dash?: string;
}

/** An axis; a tick label may hold a line break, which puts its rest below. */
export interface PlotAxis {
  readonly label: string;
  /** Unit of the values, as in our files; shown with a prefix that suits them. */
  readonly unit?: string;
  readonly domain?: readonly [number, number];
  readonly ticks?: readonly Tick[];
  /** The axis reaches 0. */
  readonly fromZero?: boolean;
}

export interface LinePlotOptions {
  readonly series: readonly PlotSeries[];
  readonly x: PlotAxis;
  readonly y: PlotAxis;
  /** Of the whole drawing, px. */
  readonly width: number;
  readonly height: number;
  readonly legend?: boolean;
  readonly theme: Theme;
}

/** Room around the plotted area, px. */
const MARGIN = { left: 52, right: 12, top: 8, bottom: 40 };

/** Lines and points on two linear axes, with ticks, error bars and a legend above. */
export function linePlot(options: LinePlotOptions): Drawing {
  const { series, theme, width } = options;
  const legend = options.legend ? drawLegend(series, width - MARGIN.left - MARGIN.right, theme) : undefined;
  const top = MARGIN.top + (legend ? legend.height + 4 : 0);
  const areaWidth = width - MARGIN.left - MARGIN.right;
  const areaHeight = options.height - top - MARGIN.bottom;
  const xDomain = options.x.domain ?? paddedDomain(series.map((one) => ({ values: one.x })), options.x.fromZero);
  const yDomain = options.y.domain ?? paddedDomain(series.map((one) => ({ values: one.y, error: one.error })), options.y.fromZero);
  const xAt = (value: number): number => (areaWidth * (value - xDomain[0])) / (xDomain[1] - xDomain[0]);
  const yAt = (value: number): number => areaHeight * (1 - (value - yDomain[0]) / (yDomain[1] - yDomain[0]));
  const area = { width: areaWidth, height: areaHeight, xAt, yAt };
  const curves = series.filter((one) => one.draw === 'line').map((one) => drawCurve(one, area)).join('');
  const points = series.filter((one) => one.draw === 'points').map((one) => drawPoints(one, area, theme)).join('');
  const body =
    drawAxes(options, xDomain, yDomain, area) + clipped(curves, areaWidth, areaHeight) + points;
  return {
    width,
    height: options.height,
    body: (legend ? moved(legend.body, MARGIN.left, MARGIN.top) : '') + moved(body, MARGIN.left, top),
  };
}

interface PlotArea {
  readonly width: number;
  readonly height: number;
  readonly xAt: (value: number) => number;
  readonly yAt: (value: number) => number;
}

/** Lowest to highest value with its error, a twentieth of room at the ends; [0, 1] where nothing is finite. */
export function paddedDomain(
  parts: readonly { readonly values: ArrayLike<number>; readonly error?: ArrayLike<number> }[],
  fromZero = false,
): readonly [number, number] {
  let low = Infinity;
  let high = -Infinity;
  for (const { values, error } of parts) {
    for (let k = 0; k < values.length; k++) {
      if (!Number.isFinite(values[k])) continue;
      const spread = error && Number.isFinite(error[k]) ? error[k] : 0;
      low = Math.min(low, values[k] - spread);
      high = Math.max(high, values[k] + spread);
    }
  }
  if (low > high) return [0, 1];
  const atZero = fromZero && low >= 0;
  if (fromZero) [low, high] = [Math.min(0, low), Math.max(0, high)];
  if (high === low) return [low - (Math.abs(low) || 1) / 2, high + (Math.abs(high) || 1) / 2];
  const room = (high - low) / 20;
  return [atZero ? 0 : low - room, high + room];
}

function drawCurve(series: PlotSeries, area: PlotArea): string {
  const { x, y, error } = series;
  const order = Array.from({ length: x.length }, (_, k) => k);
  const path = line<number>((k) => area.xAt(x[k]), (k) => area.yAt(y[k]))
    .defined((k) => Number.isFinite(x[k]) && Number.isFinite(y[k]))
    .digits(2)(order);
  const band = error ? errorBand(series, error, area) : '';
  return band + (path
    ? element('path', { class: 'curve', d: path, fill: 'none', stroke: series.colour, 'stroke-width': 1.6, 'stroke-dasharray': series.dash, 'stroke-linejoin': 'round' })
    : '');
}

function errorBand(series: PlotSeries, error: ArrayLike<number>, area: PlotArea): string {
  const { x, y } = series;
  const known = Array.from({ length: x.length }, (_, k) => k)
    .filter((k) => Number.isFinite(x[k]) && Number.isFinite(y[k]) && Number.isFinite(error[k]));
  if (known.length < 2) return '';
  const edge = (sign: number) => (k: number): readonly [number, number] => [area.xAt(x[k]), area.yAt(y[k] + sign * error[k])];
  const outline = [...known.map(edge(1)), ...[...known].reverse().map(edge(-1))];
  return element('path', { class: 'band', d: polyline(outline, true), fill: series.colour, 'fill-opacity': 0.16 });
}

/** Points with error bars; those outside the area are left out, bars are cut at its edge. */
function drawPoints(series: PlotSeries, area: PlotArea, theme: Theme): string {
  let bars = '';
  let dots = '';
  for (let k = 0; k < series.x.length; k++) {
    const [x, y] = [area.xAt(series.x[k]), area.yAt(series.y[k])];
    if (!(x >= -0.5 && x <= area.width + 0.5)) continue;
    const error = series.error?.[k] ?? NaN;
    if (Number.isFinite(error) && Number.isFinite(y)) {
      const [low, high] = [-error, error].map((step) => Math.min(area.height, Math.max(0, area.yAt(series.y[k] + step))));
      if (low !== high) bars += `M${fixed(x)},${fixed(low)}V${fixed(high)}`;
    }
    if (y >= -0.5 && y <= area.height + 0.5) {
      dots += element('circle', { cx: x, cy: y, r: 2.7, fill: theme.gap, stroke: series.colour, 'stroke-width': 1.3 });
    }
  }
  const drawn = bars ? element('path', { class: 'error-bars', d: bars, stroke: series.colour, 'stroke-width': 1, fill: 'none' }) : '';
  return element('g', { class: 'points' }, drawn + dots);
}

function drawAxes(
  options: LinePlotOptions,
  xDomain: readonly [number, number],
  yDomain: readonly [number, number],
  area: PlotArea,
): string {
  const { theme } = options;
  const small = { 'font-size': 10, fill: theme.soft };
  const xTicks = options.x.ticks ?? shownTicks(options.x, xDomain, area.width / 60).ticks;
  const yShown = shownTicks(options.y, yDomain, area.height / 32);
  const yTicks = options.y.ticks ?? yShown.ticks;
  let grid = '';
  let marks = '';
  let texts = '';
  for (const { value, label } of xTicks) {
    const x = area.xAt(value);
    grid += polyline([[x, 0], [x, area.height]]);
    marks += polyline([[x, area.height], [x, area.height + 4]]);
    label.split('\n').forEach((part, row) => {
      texts += textElement(x, area.height + 14 + 11 * row, part, { ...small, 'text-anchor': 'middle' });
    });
  }
  for (const { value, label } of yTicks) {
    const y = area.yAt(value);
    grid += polyline([[0, y], [area.width, y]]);
    marks += polyline([[-4, y], [0, y]]);
    texts += textElement(-7, y + 3.5, label, { ...small, 'text-anchor': 'end' });
  }
  const zero = yDomain[0] < 0 && yDomain[1] > 0
    ? element('path', { class: 'zero', d: polyline([[0, area.yAt(0)], [area.width, area.yAt(0)]]), stroke: theme.soft, 'stroke-width': 0.6 })
    : '';
  return (
    element('path', { class: 'grid', d: grid, stroke: theme.rule, 'stroke-width': 0.6, fill: 'none' }) +
    zero +
    element('rect', { width: area.width, height: area.height, fill: 'none', stroke: theme.soft, 'stroke-width': 0.8 }) +
    element('path', { d: marks, stroke: theme.soft, 'stroke-width': 0.8, fill: 'none' }) +
    texts +
    textElement(area.width / 2, area.height + MARGIN.bottom - 4, withUnit(options.x.label, shownTicks(options.x, xDomain, 2).unit), { fill: theme.soft, 'text-anchor': 'middle' }) +
    textElement(0, 0, withUnit(options.y.label, yShown.unit), {
      fill: theme.soft, 'text-anchor': 'middle',
      transform: `translate(${12 - MARGIN.left},${fixed(area.height / 2)}) rotate(-90)`,
    })
  );
}

/** Ticks at values in the axis's unit with labels in the shown one. */
function shownTicks(axis: PlotAxis, domain: readonly [number, number], count: number): { readonly ticks: readonly Tick[]; readonly unit: string } {
  const { factor, unit } = shownUnit(Math.max(...domain.map(Math.abs)), axis.unit ?? '');
  const ticks = tidyTicks(domain[0] * factor, domain[1] * factor, Math.max(2, Math.round(count)));
  return { ticks: ticks.map(({ value, label }) => ({ value: value / factor, label })), unit };
}

function withUnit(label: string, unit: string): string {
  return label && unit ? `${label} (${unit})` : label;
}

/** Samples and names in rows that wrap at `width` px. */
export function drawLegend(series: readonly PlotSeries[], width: number, theme: Theme): Drawing {
  let body = '';
  let [x, row] = [0, 0];
  for (const one of series.filter((each) => each.label)) {
    const wide = 28 + textWidth(one.label, 10) + 12;
    if (x > 0 && x + wide - 12 > width) [x, row] = [0, row + 1];
    const y = 6 + 14 * row;
    const sample = one.draw === 'line'
      ? element('path', { d: polyline([[x, y], [x + 22, y]]), stroke: one.colour, 'stroke-width': 1.6, 'stroke-dasharray': one.dash, fill: 'none' })
      : element('circle', { cx: x + 11, cy: y, r: 2.7, fill: theme.gap, stroke: one.colour, 'stroke-width': 1.3 });
    body += sample + textElement(x + 28, y + 3.5, one.label, { 'font-size': 10, fill: theme.soft });
    x += wide;
  }
  return { width, height: body ? 14 * (row + 1) : 0, body };
}
