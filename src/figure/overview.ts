import { azimuthProfile } from './azimuth-profile.ts';
import type { AzimuthProfile } from './azimuth-profile.ts';
import { barLabel, colourBar } from './colour-bar.ts';
import { sharedColourScale } from './colour-scale.ts';
import { mapFrame } from './map-frame.ts';
import type { MapLayers } from './map-frame.ts';
import { northTitle } from './map-panel.ts';
import type { PanelMap } from './panel-map.ts';
import { fixed, moved, svgDocument, textElement, textWidth } from './svg.ts';
import type { Drawing } from './svg.ts';
import { lightTheme } from './theme.ts';
import type { Theme } from './theme.ts';

/** A map with what lies over it. */
export interface MapView extends MapLayers {
  readonly map: PanelMap;
}

/** One row: the same quantity in every column, on one colour scale, and its profile round the ring. */
export interface OverviewRow {
  /** Such as `P, 1.4 GHz`. */
  readonly label: string;
  /** One entry a column; undefined leaves its place empty. All of one unit and kind. */
  readonly maps: readonly (MapView | undefined)[];
  /** Ends of the colours; chosen by the maps where left out. */
  readonly limits?: readonly [number, number];
  readonly profile?: AzimuthProfile;
  /** Drawings of at most `overviewBox` px in place of maps, such as shapes. */
  readonly pictures?: readonly (Drawing | undefined)[];
}

export interface Overview {
  readonly title: string;
  readonly subtitle?: string;
  /** Such as `observed`, `model`; not shown where there is one column only. */
  readonly columns: readonly string[];
  readonly rows: readonly OverviewRow[];
  /** Sentences below, such as what the lines mean. */
  readonly notes?: readonly string[];
}

/** Side of a map, px. */
export const overviewBox = 190;
const BOX = overviewBox;
/** Least height of a row: a colour bar with ticks. */
const LOWEST = 92;
const LEFT = 56;
const GAP = 16;
const BAR_ROOM = 64;
const PROFILE_WIDTH = 380;

/** The whole overview as one SVG file; the same input gives the same bytes. */
export function overviewSvg(overview: Overview, theme: Theme = lightTheme): string {
  return svgDocument(overviewDrawing(overview, theme), {
    title: overview.title,
    description: overview.rows.map((row) => row.label).join('; '),
    ink: theme.ink,
    paper: theme.paper,
  });
}

/** The overview as a drawing. Throws RangeError where a row's maps differ in unit or kind. */
export function overviewDrawing(overview: Overview, theme: Theme): Drawing {
  const columns = Math.max(1, ...overview.rows.map((row) => Math.max(row.maps.length, row.pictures?.length ?? 0)));
  const mapsWidth = LEFT + columns * (BOX + GAP) + BAR_ROOM;
  const hasProfiles = overview.rows.some((row) => row.profile);
  const width = Math.max(mapsWidth + (hasProfiles ? PROFILE_WIDTH : 0), textWidth(overview.title, 16) + LEFT) + 8;
  let y = 24;
  let body = textElement(LEFT, y, overview.title, { 'font-size': 16, 'font-weight': 600 });
  for (const line of wrapped(overview.subtitle ?? '', width - LEFT - GAP, 11)) {
    y += 16;
    body += textElement(LEFT, y, line, { fill: theme.soft });
  }
  y += 10;
  if (columns > 1) {
    y += 14;
    overview.columns.slice(0, columns).forEach((name, k) => {
      body += textElement(LEFT + k * (BOX + GAP) + BOX / 2, y, name, { 'font-size': 12, 'font-weight': 600, 'text-anchor': 'middle' });
    });
    y += 6;
  }
  for (const [k, row] of overview.rows.entries()) {
    const drawn = drawRow(row, mapsWidth, k === overview.rows.length - 1, theme);
    body += moved(drawn.body, 0, y);
    y += drawn.height;
  }
  for (const note of overview.notes ?? []) {
    for (const line of wrapped(note, width - LEFT - GAP, 10)) {
      body += textElement(LEFT, y + 10, line, { 'font-size': 10, fill: theme.soft });
      y += 14;
    }
  }
  return { width, height: y + 12, body };
}

/** A row of maps, its colour bar and profile; the last one carries the east offsets. */
function drawRow(row: OverviewRow, mapsWidth: number, last: boolean, theme: Theme): Drawing {
  const views = row.maps.filter((view) => view !== undefined);
  const top = 24;
  let body = textElement(LEFT, 16, row.label, { 'font-size': 12, 'font-weight': 600 });
  let tallest = row.profile ? BOX : 0;
  if (views.length > 0) {
    const scale = sharedColourScale(views.map((view) => view.map), row.limits);
    const first = row.maps.findIndex((view) => view !== undefined);
    const heights = views.map((view) => (BOX * view.map.ny) / Math.max(view.map.nx, view.map.ny));
    const [firstHeight] = heights;
    tallest = Math.max(tallest, LOWEST, ...heights);
    row.maps.forEach((view, k) => {
      if (!view) return;
      const frame = mapFrame(view.map, {
        ...view, scale, boxWidth: BOX, boxHeight: BOX, axes: 'arcsec', numbers: { east: last, north: k === first }, theme,
      });
      const left = LEFT + k * (BOX + GAP) + (BOX - frame.width) / 2;
      body += moved(frame.body, left, top);
      if (last) body += textElement(left + frame.width / 2, top + frame.height + 29, 'offset east (arcsec)', { 'font-size': 10, fill: theme.soft, 'text-anchor': 'middle' });
    });
    const bar = colourBar(scale, barLabel(scale), tallest - 32, true, theme);
    body += moved(bar.body, LEFT + row.maps.length * (BOX + GAP), top);
    body += textElement(0, 0, northTitle(firstHeight, 'arcsec'), {
      'font-size': 10, fill: theme.soft, 'text-anchor': 'middle', transform: `translate(${fixed(first * (BOX + GAP) + 14)},${fixed(top + firstHeight / 2)}) rotate(-90)`,
    });
  }
  row.pictures?.forEach((picture, k) => {
    if (!picture) return;
    tallest = Math.max(tallest, picture.height);
    body += moved(picture.body, LEFT + k * (BOX + GAP) + (BOX - picture.width) / 2, top);
  });
  if (row.profile) {
    const plot = azimuthProfile(row.profile, { width: PROFILE_WIDTH, height: BOX + 36, theme });
    body += moved(plot.body, mapsWidth, top - 8);
  }
  return { width: mapsWidth, height: top + tallest + (last ? 44 : row.profile ? 26 : 14), body };
}

/** Text broken at spaces into lines of at most `width` px. */
export function wrapped(text: string, width: number, sizePx: number): readonly string[] {
  const lines: string[] = [];
  for (const word of text.split(/\s+/).filter(Boolean)) {
    const longer = lines.length ? `${lines[lines.length - 1]} ${word}` : word;
    if (lines.length && textWidth(longer, sizePx) <= width) lines[lines.length - 1] = longer;
    else lines.push(word);
  }
  return lines;
}
