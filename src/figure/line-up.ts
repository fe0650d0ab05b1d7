import { azimuthProfile } from './azimuth-profile.ts';
import type { AzimuthValues } from './azimuth-profile.ts';
import { barLabel, colourBar } from './colour-bar.ts';
import { sharedColourScale } from './colour-scale.ts';
import { paddedDomain } from './line-plot.ts';
import { mapFrame } from './map-frame.ts';
import type { MapView } from './overview.ts';
import { htmlTable } from './report-html.ts';
import type { Cell } from './report-html.ts';
import { escapeXml, moved, svgDocument } from './svg.ts';
import { hypothesisStyle, pageTheme } from './theme.ts';

/** The same quantity for the observation and every hypothesis, in their order, on one colour scale. */
export interface MapRow {
  readonly kind: 'maps';
  /** Such as `P, 1.4 GHz`. */
  readonly label: string;
  readonly observed?: MapView;
  readonly models: readonly (MapView | undefined)[];
}

/** Profiles round a ring: the observation's points over every hypothesis's curve. */
export interface ProfileRow {
  readonly kind: 'profile';
  readonly label: string;
  readonly quantity: string;
  readonly unit: string;
  readonly observed?: AzimuthValues;
  readonly models: readonly (AzimuthValues | undefined)[];
}

/** A row of words, such as verdicts. */
export interface WordRow {
  readonly kind: 'words';
  readonly label: string;
  readonly observed?: string;
  readonly models: readonly string[];
}

export type LineUpRow = MapRow | ProfileRow | WordRow;

const MAP = 212;
const PROFILE = { width: 232, height: 168 };

/**
 * The line-up as an HTML table: columns are the observation, where some row has one, and the
 * hypotheses; rows are questions, each on one scale. `names` are the hypotheses'.
 */
export function lineUpTable(names: readonly string[], rows: readonly LineUpRow[], caption: string): string {
  for (const row of rows) {
    if (row.models.length !== names.length) throw new RangeError(`row "${row.label}" has ${row.models.length} models for ${names.length} hypotheses`);
  }
  const hasObserved = rows.some((row) => row.observed !== undefined);
  const columns = [...(hasObserved ? ['observation'] : []), ...names];
  const cells = rows.map((row): readonly Cell[] => {
    const [heading, observed, ...models] = rowCells(row, names);
    return hasObserved ? [heading, observed, ...models] : [heading, ...models];
  });
  return htmlTable(caption, ['', ...columns], cells).replace('<table>', '<table class="line-up">').replace('<th scope="col"></th>', '<td></td>');
}

/** Heading, observation, then one cell a hypothesis. */
function rowCells(row: LineUpRow, names: readonly string[]): readonly Cell[] {
  if (row.kind === 'maps') return mapCells(row, names);
  if (row.kind === 'profile') return profileCells(row, names);
  return [row.label, row.observed ?? '', ...row.models];
}

function mapCells(row: MapRow, names: readonly string[]): readonly Cell[] {
  const views = [row.observed, ...row.models];
  const maps = views.filter((view) => view !== undefined).map((view) => view.map);
  if (maps.length === 0) return [row.label, ...views.map(() => '')];
  const scale = sharedColourScale(maps);
  const bar = colourBar(scale, barLabel(scale), 108, false, pageTheme);
  const barSvg = svgDocument(bar, { title: `Colours of ${row.label}`, ink: pageTheme.ink });
  const pictures = views.map((view, k): Cell => {
    if (!view) return '';
    const frame = mapFrame(view.map, { ...view, scale, boxWidth: MAP, boxHeight: MAP, axes: 'none', theme: pageTheme });
    const drawing = { width: frame.width + 2, height: frame.height + 2, body: moved(frame.body, 1, 1) };
    return { html: svgDocument(drawing, { title: `${row.label}, ${columnName(k, names)}`, ink: pageTheme.ink }) };
  });
  return [{ html: `<div>${escapeXml(row.label)}</div>${barSvg}` }, ...pictures];
}

function profileCells(row: ProfileRow, names: readonly string[]): readonly Cell[] {
  const all = [row.observed, ...row.models].filter((one) => one !== undefined);
  const domain = paddedDomain(all.map(({ value, error }) => ({ values: value, error })), true);
  const pictures = [undefined, ...row.models].map((curve, k): Cell => {
    if (!curve && (k > 0 || !row.observed)) return '';
    const style = hypothesisStyle(Math.max(0, k - 1), pageTheme);
    const drawing = azimuthProfile(
      {
        quantity: row.quantity,
        unit: row.unit,
        curves: curve ? [{ ...curve, colour: style.colour, dash: style.dash }] : [],
        data: row.observed ? [row.observed] : [],
        domain,
      },
      { ...PROFILE, legend: false, theme: pageTheme },
    );
    return { html: svgDocument(drawing, { title: `${row.label}, ${columnName(k, names)}`, ink: pageTheme.ink }) };
  });
  return [row.label, ...pictures];
}

function columnName(column: number, names: readonly string[]): string {
  return column === 0 ? 'observation' : names[column - 1];
}
