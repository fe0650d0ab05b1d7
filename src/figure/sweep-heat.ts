import { shortName, valueText } from '../sweep/levels.ts';
import { drawnColumns, type SweepHeat, type SweepReading } from '../sweep/reading.ts';
import type { SweepPlan } from '../sweep/types.ts';
import { sharedColourScale } from './colour-scale.ts';
import { levelMap } from './level-map.ts';
import { panelGrid, type TitledDrawing } from './panel-grid.ts';
import { axisLabel } from './sweep-axis.ts';
import type { Drawing } from './svg.ts';
import type { Theme } from './theme.ts';

const CELL = { width: 240, height: 180 };

/** Every drawn measure over two varied quantities; variants of the scene beside each other on one colour scale. */
export function sweepHeat(plan: SweepPlan, reading: SweepReading, heat: SweepHeat, theme: Theme): Drawing {
  const [x, y] = heat.axes.map((k, side) => ({
    label: axisLabel(plan.axes[k]),
    levels: heat.levels[side].middles.map((value) => valueText(plan.axes[k], value)),
  }));
  const size = x.levels.length * y.levels.length;
  const panels = drawnColumns(reading.columns).flatMap((column): TitledDrawing[] => {
    const { label, unit } = reading.columns[column];
    const mean = heat.moments[column].mean;
    const maps = plan.variants.map((_, variant) => mean.subarray(variant * size, (variant + 1) * size));
    const signed = mean.some((value) => value < 0);
    const scale = sharedColourScale(maps.map((values) => ({ values, nx: x.levels.length, ny: y.levels.length, pixelArcsec: 1, unit, title: label, kind: signed ? 'signed' : 'intensity' })));
    return maps.map((values, variant) => ({
      title: plan.variants.length > 1 ? `${label}: ${plan.variants[variant].name}` : label,
      drawing: levelMap(values, x, y, scale, CELL.width, CELL.height, theme),
    }));
  });
  const names = heat.axes.map((k) => shortName(plan.axes[k].path)).join(' and ');
  return panelGrid(panels, Math.min(4, Math.max(plan.variants.length, 3)), `Over ${names}`);
}
