import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { importanceBars } from '../figure/importance-bars.ts';
import { methodsText } from '../figure/methods-text.ts';
import { overviewDrawing, type MapView, type Overview } from '../figure/overview.ts';
import { sweepCurves } from '../figure/sweep-curves.ts';
import { sweepHeat } from '../figure/sweep-heat.ts';
import { sweepReportHtml } from '../figure/sweep-report.ts';
import { svgDocument, type Drawing } from '../figure/svg.ts';
import { lightTheme, pageTheme, type Theme } from '../figure/theme.ts';
import { readFits } from '../files/fits-read.ts';
import { readBytes } from '../files/node-io.ts';
import { sha256OfText } from '../files/sha256.ts';
import { skyImageFromFits } from '../files/sky-fits-read.ts';
import { mapFile, pointFolder } from '../run/sweep-service.ts';
import type { Crossing } from '../sweep/crossings.ts';
import { gridSteps, makeDesign, pointsPerVariant, rowCount } from '../sweep/design.ts';
import { columnBands } from '../sweep/evaluate.ts';
import { shortName, valueText } from '../sweep/levels.ts';
import { sceneAt } from '../sweep/plan.ts';
import type { SweepReading } from '../sweep/reading.ts';
import type { SweepSource } from '../sweep/source.ts';
import type { MapName, SweepPlan } from '../sweep/types.ts';
import { gridFromScene } from '../sky/grid.ts';
import { slug, type OutputFolder } from './output-folder.ts';

/** Most maps in one row of a strip. */
const stripMaps = 7;

/** Adds the figures of a sweep, and the report that shows them. */
export function addSweepFigures(folder: OutputFolder, plan: SweepPlan, source: SweepSource, reading: SweepReading, crossings: readonly Crossing[], maps: string): void {
  const importance = reading.importance();
  const { heat } = reading;
  const strip = stripOf(plan, maps);
  const draw = (name: string, title: string, drawing: (theme: Theme) => Drawing): string => {
    folder.add(`${name}.svg`, svgDocument(drawing(lightTheme), { title, ink: lightTheme.ink, paper: lightTheme.paper }));
    return svgDocument(drawing(pageTheme), { title, ink: pageTheme.ink });
  };
  const curves = reading.curves.map((one) => draw(`curves-${slug(plan.axes[one.axis].path)}`, `Measures against ${plan.axes[one.axis].path}`, (theme) => sweepCurves(plan, reading, one, theme)));
  const varies = importance.some(({ indices }) => indices.some(({ total }) => Number.isFinite(total)));
  const { observation, numerics, turbulence } = plan.variants[0].scene;
  folder.add('report.html', sweepReportHtml({
    plan, reading, crossings, importance, curves,
    rows: rowCount(plan),
    ...(strip && { strip: draw('strip', strip.title, (theme) => overviewDrawing(strip, theme)) }),
    ...(heat && { heat: draw('heat-map', 'Measures over two quantities', (theme) => sweepHeat(plan, reading, heat, theme)) }),
    ...(varies && { bars: draw('importance', 'Shares of the variance', (theme) => importanceBars(plan, reading, importance, theme)) }),
    methods: methodsText({
      tolerance: numerics.tolerance, turbulence: turbulence.unresolved !== undefined, beam: observation.beam !== undefined,
      noise: plan.realisations > 0, debiased: plan.realisations > 0, ...(plan.measures.includes('gradient') && { rotationMeasure: 'fit' }),
    }),
    provenance: [`gyrelight sweep ${source.file}`, `version ${source.version}`, `SHA-256 of the sweep: ${sha256OfText(source.text)}`, ...source.scenes.map(({ file, text }) => `${file}: ${sha256OfText(text)}`)],
  }));
}

/** Kept maps along the first range of a grid, one row a variant, all else at the middle of its values. */
function stripOf(plan: SweepPlan, folder: string): Overview | undefined {
  const along = plan.axes.findIndex(({ spacing }) => spacing !== 'list');
  if (plan.design !== 'grid' || along < 0 || plan.maps.length === 0) return undefined;
  const name = plan.maps.includes('P') ? 'P' : plan.maps[0];
  const [first] = columnBands(plan).names;
  const band = name === 'RM' ? undefined : first;
  const per = pointsPerVariant(plan);
  const { values } = plan.axes[along];
  const count = Math.min(stripMaps, values.length);
  const steps = Array.from({ length: count }, (_, k) => Math.round((k * (values.length - 1)) / Math.max(1, count - 1)));
  const wanted = plan.axes.map((axis) => Math.floor(axis.values.length / 2));
  const inside = steps.map((step) => plan.axes.reduce((point, axis, k) => point * axis.values.length + (k === along ? step : wanted[k]), 0));
  const others = plan.axes.flatMap((axis, k) => (k === along ? [] : [`${shortName(axis.path)} ${valueText(axis, axis.values[gridSteps(plan.axes, inside[0])[k]])}`]));
  const design = makeDesign(plan);
  const rows = plan.variants.map((variant, v) => ({
    label: plan.variants.length > 1 ? variant.name : `${name}${band === undefined ? '' : `, ${band}`}`,
    maps: inside.map((point): MapView | undefined => {
      const number = v * per + point;
      const path = join(folder, pointFolder(number), mapFile(name, band));
      if (!existsSync(path)) return undefined;
      const image = skyImageFromFits(readFits(readBytes(path), path), path);
      const grid = gridFromScene(sceneAt(plan, v, design(number).values));
      const { beam } = variant.scene.observation;
      return { map: { values: image.values, nx: grid.nx, ny: grid.ny, pixelArcsec: grid.pixelArcsec, pixelKpc: grid.pixelKpc, unit: unitOf(name, beam !== undefined), title: path, kind: kindOf(name), ...(beam && { beam }) } };
    }),
  }));
  if (rows.every(({ maps }) => maps.every((map) => map === undefined))) return undefined;
  return {
    title: `${name}${band === undefined ? '' : `, ${band}`} along ${shortName(plan.axes[along].path)}`,
    ...(others.length > 0 && { subtitle: others.join(', ') }),
    columns: steps.map((step) => valueText(plan.axes[along], values[step])),
    rows,
  };
}

function kindOf(name: MapName): 'intensity' | 'signed' | 'angle' {
  if (name === 'chi') return 'angle';
  return ['Q', 'U', 'RM', 'origin-height'].includes(name) ? 'signed' : 'intensity';
}

function unitOf(name: MapName, hasBeam: boolean): string {
  const units: Partial<Record<MapName, string>> = { fraction: '', chi: 'deg', RM: 'rad/m^2', 'origin-height': 'kpc' };
  return units[name] ?? (hasBeam ? 'Jy/beam' : 'Jy/sr');
}
