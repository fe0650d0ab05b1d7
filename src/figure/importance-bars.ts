import type { SweepImportance, SweepReading } from '../sweep/reading.ts';
import { shortName } from '../sweep/levels.ts';
import type { SweepPlan } from '../sweep/types.ts';
import { panelGrid, type TitledDrawing } from './panel-grid.ts';
import { element, moved, polyline, textElement, textWidth } from './svg.ts';
import type { Drawing } from './svg.ts';
import { TEAL, type Theme } from './theme.ts';

const LINE = 26;
const WIDTH = 200;
const BOTTOM = 34;

/** First-order (full bars) and total (pale bars) indices of every measure that varies, with their errors as whiskers. */
export function importanceBars(plan: SweepPlan, reading: SweepReading, importance: readonly SweepImportance[], theme: Theme): Drawing {
  const left = 12 + Math.max(...plan.axes.map(({ path }) => textWidth(shortName(path), 10)));
  const panels = importance.filter(({ indices }) => indices.some(({ total }) => Number.isFinite(total))).map(({ variant, column, indices }): TitledDrawing => {
    const height = LINE * indices.length;
    const at = (share: number): number => WIDTH * Math.min(1.05, Math.max(-0.05, share));
    let body = '';
    for (const tick of [0, 0.25, 0.5, 0.75, 1]) {
      body += element('path', { d: polyline([[at(tick), 0], [at(tick), height + 4]]), stroke: theme.rule, 'stroke-width': 0.6 }) +
        textElement(at(tick), height + 15, String(tick), { 'font-size': 10, fill: theme.soft, 'text-anchor': 'middle' });
    }
    indices.forEach(({ first, firstError, total, totalError }, k) => {
      const y = LINE * k;
      body += textElement(-8, y + 16, shortName(plan.axes[k].path), { 'font-size': 10, fill: theme.soft, 'text-anchor': 'end' });
      if (!Number.isFinite(total)) return;
      body += bar(at(total) - at(0), y + 4, 18, 0.3) + bar(at(first) - at(0), y + 8, 10, 1) + whisker(at(total - totalError), at(total + totalError), y + 6, theme) + whisker(at(first - firstError), at(first + firstError), y + 13, theme);
    });
    body += textElement(WIDTH / 2, height + 28, 'share of the variance', { 'font-size': 10, fill: theme.soft, 'text-anchor': 'middle' });
    const title = `${reading.columns[column].label}${plan.variants.length > 1 ? `: ${plan.variants[variant].name}` : ''}`;
    return { title, drawing: { width: Math.max(left + WIDTH + 24, textWidth(title, 12)), height: height + BOTTOM, body: moved(body, left, 0) } };
  });
  return panelGrid(panels, 3, 'What matters: by itself (full), with its joint effects (pale)');
}

function bar(width: number, y: number, height: number, opacity: number): string {
  return element('rect', { x: Math.min(0, width), y, width: Math.abs(width), height, fill: TEAL, 'fill-opacity': opacity });
}

function whisker(low: number, high: number, y: number, theme: Theme): string {
  if (!(high > low)) return '';
  return element('path', { d: polyline([[low, y], [high, y]]) + polyline([[low, y - 2.5], [low, y + 2.5]]) + polyline([[high, y - 2.5], [high, y + 2.5]]), stroke: theme.ink, 'stroke-width': 1, fill: 'none' });
}
