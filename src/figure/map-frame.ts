import type { ColourScale } from './colour-scale.ts';
import { drawContours } from './contour-lines.ts';
import type { ContourLayer } from './contour-lines.ts';
import { mapImage } from './map-image.ts';
import { drawBeam, drawRing, drawScaleBar } from './map-marks.ts';
import type { Ring } from './map-marks.ts';
import { placeMap } from './map-place.ts';
import type { MapPlace } from './map-place.ts';
import { drawOrientation } from './orientation-lines.ts';
import type { OrientationLayer } from './orientation-lines.ts';
import { assertMapShape } from './panel-map.ts';
import type { PanelMap } from './panel-map.ts';
import { clipped, element, polyline, textElement } from './svg.ts';
import type { Drawing } from './svg.ts';
import { overlayInk } from './theme.ts';
import type { OverlayInk, Theme } from './theme.ts';
import { tidyTicks } from './ticks.ts';

/** Unit of the offsets along the axes; `none` draws a bare frame. */
export type MapAxes = 'arcsec' | 'kpc' | 'none';

/** What lies over a map. */
export interface MapLayers {
  readonly contours?: ContourLayer;
  readonly orientation?: OrientationLayer;
  readonly rings?: readonly Ring[];
}

export interface MapFrameOptions extends MapLayers {
  readonly scale: ColourScale;
  /** The map is fitted into this box, px. */
  readonly boxWidth: number;
  readonly boxHeight: number;
  readonly axes: MapAxes;
  /** Which axes carry numbers; both where left out. */
  readonly numbers?: { readonly east: boolean; readonly north: boolean };
  readonly theme: Theme;
}

/**
 * A map with its layers, beam, scale bar, frame and ticks. Width and height are the frame's: ticks and
 * numbers hang outside it, left and below. Throws RangeError where array and size disagree.
 */
export function mapFrame(map: PanelMap, options: MapFrameOptions): Drawing {
  assertMapShape(map);
  const { theme } = options;
  const place = placeMap(map, options.boxWidth, options.boxHeight);
  const ink = overlayInk(map.kind);
  const inside = [
    mapImage(map, options.scale, place.width, place.height, theme.soft),
    options.contours ? drawContours(map, options.contours, place, ink) : '',
    options.orientation ? drawOrientation(map, options.orientation, place, ink) : '',
    ...(options.rings ?? []).map((ring) => drawRing(map, ring, place, ink)),
    map.beam ? drawBeam(map.beam, place, cornerInk(map, 'left', theme)) : '',
    drawScaleBar(map, place, cornerInk(map, 'right', theme)),
  ].join('');
  const frame = element('rect', { width: place.width, height: place.height, fill: 'none', stroke: theme.soft, 'stroke-width': 0.8 });
  return {
    width: place.width,
    height: place.height,
    body: clipped(inside, place.width, place.height) + frame + offsetTicks(map, place, options),
  };
}

/** Ink of a mark in a lower corner: the page's where the map is blank there. */
function cornerInk(map: PanelMap, side: 'left' | 'right', theme: Theme): OverlayInk {
  const [columns, rows] = [Math.ceil(map.nx / 4), Math.ceil(map.ny / 8)];
  const start = side === 'left' ? 0 : map.nx - columns;
  let blank = 0;
  for (let row = 0; row < rows; row++) {
    for (let column = start; column < start + columns; column++) {
      if (!Number.isFinite(map.values[row * map.nx + column])) blank++;
    }
  }
  return 2 * blank > columns * rows ? { line: theme.ink, casing: theme.gap } : overlayInk(map.kind);
}

/** Ticks of the offsets; east grows to the left. */
function offsetTicks(map: PanelMap, place: MapPlace, options: MapFrameOptions): string {
  const { axes, theme } = options;
  const numbers = options.numbers ?? { east: true, north: true };
  if (axes === 'none') return '';
  if (axes === 'kpc' && !map.pixelKpc) throw new RangeError(`map "${map.title}" has no pixel size in kpc for its axes`);
  const perPixel = axes === 'kpc' ? (map.pixelKpc ?? 1) : map.pixelArcsec;
  const arcsecPerUnit = map.pixelArcsec / perPixel;
  const px = place.pxPerArcsec * arcsecPerUnit;
  const [centreX, centreY] = place.offset(0, 0);
  const small = { 'font-size': 10, fill: theme.soft };
  let lines = '';
  let texts = '';
  for (const tick of tidyTicks((centreX - place.width) / px, centreX / px, place.width / 45)) {
    const x = centreX - tick.value * px;
    lines += polyline([[x, place.height], [x, place.height + 4]]);
    if (numbers.east) texts += textElement(x, place.height + 14, tick.label, { ...small, 'text-anchor': 'middle' });
  }
  for (const tick of tidyTicks((centreY - place.height) / px, centreY / px, place.height / 45)) {
    const y = centreY - tick.value * px;
    lines += polyline([[-4, y], [0, y]]);
    if (numbers.north) texts += textElement(-7, y + 3.5, tick.label, { ...small, 'text-anchor': 'end' });
  }
  return element('path', { d: lines, stroke: theme.soft, 'stroke-width': 0.8, fill: 'none' }) + texts;
}
