import { weightedQuantiles } from '../math/moments.ts';
import { contours } from 'd3-contour';
import { numberText, unitText } from './number-text.ts';
import { element, fixed, moved, polyline, svgDocument, textElement } from './svg.ts';
import type { Drawing } from './svg.ts';
import { lightTheme, TEAL } from './theme.ts';
import type { Theme } from './theme.ts';
import { tidyTicks } from './ticks.ts';

/** One parameter of a posterior; values of all its samples. */
export interface PairwiseParameter {
  readonly label: string;
  readonly unit: string;
  readonly values: ArrayLike<number>;
  /** Drawn as a line, such as the best fit. */
  readonly mark?: number;
}

export interface PairwiseOptions {
  readonly title: string;
  /** Of the samples; default 1 each. */
  readonly weights?: ArrayLike<number>;
  /** Side of one panel, px. */
  readonly panel?: number;
  readonly theme?: Theme;
}

/** Bins of a histogram to one side. */
const bins = 24;
/** Shares of the posterior inside the contours: those inside 1 and 2 sigma of a two-dimensional Gaussian. */
const contourShares = [0.393, 0.865];
const margin = { left: 64, right: 10, top: 26, bottom: 52 };
const gap = 6;

/**
 * The posterior of every pair of parameters as contours (39.3 and 86.5 % inside), and of each by
 * itself as a histogram with its median and 16 to 84 % on the diagonal.
 */
export function pairwisePlot(parameters: readonly PairwiseParameter[], options: PairwiseOptions): Drawing {
  const { weights, panel = 110, theme = lightTheme } = options;
  const ranges = parameters.map(({ values }) => shownRange(values, weights));
  const step = panel + gap;
  const body = parameters.flatMap((vertical, row) =>
    parameters.slice(0, row + 1).map((horizontal, column) => {
      const inside =
        row === column
          ? histogram(horizontal, ranges[column], weights, panel, theme)
          : pairContours(horizontal, vertical, ranges[column], ranges[row], weights, panel, theme);
      const edges =
        element('rect', { width: panel, height: panel, fill: 'none', stroke: theme.soft, 'stroke-width': 0.8 }) +
        (row === parameters.length - 1 ? lowerAxis(horizontal, ranges[column], panel, theme) : '') +
        (column === 0 && row > 0 ? leftAxis(vertical, ranges[row], panel, theme) : '');
      return moved(inside + edges, margin.left + step * column, margin.top + step * row);
    }),
  );
  const size = step * parameters.length - gap;
  return { width: margin.left + size + margin.right, height: margin.top + size + margin.bottom, body: body.join('') };
}

/** `pairwisePlot` as a whole SVG file. */
export function pairwisePlotSvg(parameters: readonly PairwiseParameter[], options: PairwiseOptions): string {
  const theme = options.theme ?? lightTheme;
  return svgDocument(pairwisePlot(parameters, options), { title: options.title, ink: theme.ink, paper: theme.paper });
}

type Range = readonly [number, number];

/** From the 0.2 to the 99.8 % point, with a little room. */
function shownRange(values: ArrayLike<number>, weights: ArrayLike<number> | undefined): Range {
  const [low, high] = weightedQuantiles(values, [0.002, 0.998], weights);
  const room = (high - low) / 12 || Math.abs(low) / 100 || 1;
  return [low - room, high + room];
}

function binOf(value: number, [low, high]: Range): number {
  return Math.floor((bins * (value - low)) / (high - low));
}

function histogram({ label, unit, values, mark }: PairwiseParameter, range: Range, weights: ArrayLike<number> | undefined, panel: number, theme: Theme): string {
  const counts = new Float64Array(bins);
  for (let k = 0; k < values.length; k++) {
    const bin = binOf(values[k], range);
    if (bin >= 0 && bin < bins) counts[bin] += weights ? weights[k] : 1;
  }
  const top = counts.reduce((a, b) => Math.max(a, b), 0) * 1.1 || 1;
  const at = (value: number): number => (panel * (value - range[0])) / (range[1] - range[0]);
  const outline: [number, number][] = [[0, panel]];
  counts.forEach((count, k) => {
    const y = panel * (1 - count / top);
    outline.push([(panel * k) / bins, y], [(panel * (k + 1)) / bins, y]);
  });
  outline.push([panel, panel]);
  const quantiles = weightedQuantiles(values, [0.16, 0.5, 0.84], weights);
  const lines = quantiles.map((value) => polyline([[at(value), 0], [at(value), panel]])).join('');
  const [low, median, high] = quantiles;
  const digits = Math.max(2, Math.min(8, Math.ceil(Math.log10(Math.abs(median) / Math.max(high - low, 1e-300))) + 2 || 2));
  return (
    element('path', { d: polyline(outline, true), fill: TEAL, 'fill-opacity': 0.18, stroke: TEAL, 'stroke-width': 1.2 }) +
    element('path', { class: 'quantiles', d: lines, stroke: theme.soft, 'stroke-width': 0.8, 'stroke-dasharray': '3 2', fill: 'none' }) +
    markLine(mark, range, panel, theme, false) +
    textElement(panel / 2, -6, `${shortLabel(label)} = ${numberText(median, digits)} ${unitText(unit)}`.trim(), { 'font-size': 8.5, fill: theme.ink, 'text-anchor': 'middle' })
  );
}

function pairContours(
  horizontal: PairwiseParameter, vertical: PairwiseParameter, xRange: Range, yRange: Range,
  weights: ArrayLike<number> | undefined, panel: number, theme: Theme,
): string {
  const counts = new Float64Array(bins * bins);
  for (let k = 0; k < horizontal.values.length; k++) {
    const [x, y] = [binOf(horizontal.values[k], xRange), binOf(vertical.values[k], yRange)];
    if (x >= 0 && x < bins && y >= 0 && y < bins) counts[(bins - 1 - y) * bins + x] += weights ? weights[k] : 1;
  }
  const smooth = smoothed(counts);
  const levels = levelsHolding(smooth, contourShares);
  const scale = panel / bins;
  const shapes = contours().size([bins, bins]).thresholds([...levels].sort((a, b) => a - b))(Array.from(smooth));
  const paths = shapes.map(({ coordinates }, k) => {
    const d = coordinates.flatMap((polygon) => polygon.map((ring) => polyline(ring.map(([x, y]) => [x * scale, y * scale] as const), true))).join('');
    return d === '' ? '' : element('path', { class: 'contour', d, fill: TEAL, 'fill-opacity': k === 0 ? 0.14 : 0.24, 'fill-rule': 'evenodd', stroke: TEAL, 'stroke-width': 1 });
  });
  return paths.join('') + markLine(horizontal.mark, xRange, panel, theme, false) + markLine(vertical.mark, yRange, panel, theme, true);
}

/** Each bin with its neighbours, weights 1 2 1 both ways, twice: counts are few. */
function smoothed(counts: Float64Array): Float64Array {
  let now = counts;
  for (const stride of [1, bins, 1, bins]) {
    now = now.map((value, k, all) => {
      const place = stride === 1 ? k % bins : Math.floor(k / bins);
      return (2 * value + (place > 0 ? all[k - stride] : 0) + (place < bins - 1 ? all[k + stride] : 0)) / 4;
    });
  }
  return now;
}

/** Densities above which the wanted shares of all lie. */
function levelsHolding(density: Float64Array, shares: readonly number[]): number[] {
  const sorted = [...density].sort((a, b) => b - a);
  const total = sorted.reduce((a, b) => a + b, 0);
  return shares.map((share) => {
    let sum = 0;
    return sorted.find((value) => (sum += value) >= share * total) ?? 0;
  });
}

function markLine(mark: number | undefined, [low, high]: Range, panel: number, theme: Theme, level: boolean): string {
  if (mark === undefined || !(mark > low && mark < high)) return '';
  const at = (panel * (mark - low)) / (high - low);
  const d = level ? polyline([[0, panel - at], [panel, panel - at]]) : polyline([[at, 0], [at, panel]]);
  return element('path', { class: 'mark', d, stroke: theme.ink, 'stroke-width': 0.8, fill: 'none' });
}

function lowerAxis({ label, unit }: PairwiseParameter, range: Range, panel: number, theme: Theme): string {
  const ticks = tidyTicks(range[0], range[1], 3).map(({ value, label: text }) => {
    const x = (panel * (value - range[0])) / (range[1] - range[0]);
    return element('path', { d: polyline([[x, panel], [x, panel + 3]]), stroke: theme.soft, 'stroke-width': 0.8 }) +
      textElement(x, panel + 13, text, { 'font-size': 8, fill: theme.soft, 'text-anchor': 'middle' });
  });
  return ticks.join('') + textElement(panel / 2, panel + 28, withUnit(label, unit), { 'font-size': 8.5, fill: theme.soft, 'text-anchor': 'middle' });
}

function leftAxis({ label, unit }: PairwiseParameter, range: Range, panel: number, theme: Theme): string {
  const ticks = tidyTicks(range[0], range[1], 3).map(({ value, label: text }) => {
    const y = panel * (1 - (value - range[0]) / (range[1] - range[0]));
    return element('path', { d: polyline([[-3, y], [0, y]]), stroke: theme.soft, 'stroke-width': 0.8 }) +
      textElement(-6, y + 3, text, { 'font-size': 8, fill: theme.soft, 'text-anchor': 'end' });
  });
  return ticks.join('') + textElement(0, 0, withUnit(label, unit), {
    'font-size': 8.5, fill: theme.soft, 'text-anchor': 'middle', transform: `translate(${-margin.left + 18},${fixed(panel / 2)}) rotate(-90)`,
  });
}

/** The last two parts of a path: `halo.strength`. */
function shortLabel(label: string): string {
  return label.split('.').slice(-2).join('.');
}

function withUnit(label: string, unit: string): string {
  return unit ? `${shortLabel(label)} (${unitText(unit)})` : shortLabel(label);
}
