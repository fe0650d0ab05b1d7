import type { Beam } from '../scene/types.ts';
import type { MapPlace } from './map-place.ts';
import { frameDirection } from './map-place.ts';
import { numberText } from './number-text.ts';
import type { PanelMap } from './panel-map.ts';
import { element, fixed, polyline, textElement, textWidth } from './svg.ts';
import type { OverlayInk } from './theme.ts';
import { roundLength } from './ticks.ts';

const DEGREES = 180 / Math.PI;
const INSET = 9;

/** A circle in the plane of the disc about its centre, seen on the sky. */
export interface Ring {
  readonly radiusKpc: number;
  /** rad */
  readonly inclination: number;
  /** Of the receding half of the major axis, rad, north through east. */
  readonly positionAngle: number;
}

/** The projected ring as a thin ellipse with a dot at azimuth 0, the receding end of the major axis. */
export function drawRing(map: PanelMap, ring: Ring, place: MapPlace, ink: OverlayInk): string {
  if (!map.pixelKpc) return '';
  const pxPerKpc = (place.pxPerArcsec * map.pixelArcsec) / map.pixelKpc;
  const major = ring.radiusKpc * pxPerKpc;
  const [x, y] = place.offset(0, 0);
  const [dx, dy] = frameDirection(ring.positionAngle);
  const shape = {
    cx: x,
    cy: y,
    rx: major * Math.abs(Math.cos(ring.inclination)),
    ry: major,
    transform: turned(ring.positionAngle, x, y),
    fill: 'none',
  };
  return (
    element('ellipse', { class: 'casing', ...shape, stroke: ink.casing, 'stroke-width': 2, 'stroke-opacity': 0.45 }) +
    element('ellipse', { class: 'ring', ...shape, stroke: ink.line, 'stroke-width': 0.9, 'stroke-dasharray': '4 2' }) +
    element('circle', { cx: x + major * dx, cy: y + major * dy, r: 2.6, fill: ink.line, stroke: ink.casing, 'stroke-width': 0.8 })
  );
}

/** The beam at half maximum, true in size and angle, in the lower left corner. */
export function drawBeam(beam: Beam, place: MapPlace, ink: OverlayInk): string {
  const rx = (beam.minorArcsec * place.pxPerArcsec) / 2;
  const ry = (beam.majorArcsec * place.pxPerArcsec) / 2;
  const room = Math.max(2, ry);
  const [x, y] = [INSET + room, place.height - INSET - room];
  return element('ellipse', {
    class: 'beam', cx: x, cy: y, rx: Math.max(0.5, rx), ry: Math.max(0.5, ry), transform: turned(beam.angle, x, y),
    fill: ink.line, 'fill-opacity': 0.85, stroke: ink.casing, 'stroke-width': 0.8,
  });
}

/** A length of 1, 2 or 5 times a power of ten kpc, at most a quarter of the map, in the lower right corner. */
export function drawScaleBar(map: PanelMap, place: MapPlace, ink: OverlayInk): string {
  if (!map.pixelKpc) return '';
  const pxPerKpc = (place.pxPerArcsec * map.pixelArcsec) / map.pixelKpc;
  const lengthKpc = roundLength(place.width / 4 / pxPerKpc);
  const label = lengthKpc < 1 ? `${numberText(lengthKpc * 1000, 1)} pc` : `${numberText(lengthKpc, 1)} kpc`;
  const length = lengthKpc * pxPerKpc;
  const right = place.width - INSET;
  const middle = Math.min(right - length / 2, right - textWidth(label, 10) / 2);
  const y = place.height - INSET;
  const path = polyline([[middle - length / 2, y], [middle + length / 2, y]]);
  return (
    element('path', { class: 'casing', d: path, stroke: ink.casing, 'stroke-width': 3.6, 'stroke-opacity': 0.85 }) +
    element('path', { class: 'scale-bar', d: path, stroke: ink.line, 'stroke-width': 1.6 }) +
    element('rect', { class: 'casing', x: middle - textWidth(label, 10) / 2 - 1, y: y - 14, width: textWidth(label, 10) + 2, height: 11.5, rx: 2, fill: ink.casing, 'fill-opacity': 0.4 }) +
    textElement(middle, y - 5, label, { 'text-anchor': 'middle', 'font-size': 10, fill: ink.line })
  );
}

/** Turns an upright shape at (x, y) to a position angle: counter-clockwise, since east is left. */
function turned(positionAngle: number, x: number, y: number): string {
  return `rotate(${fixed(-positionAngle * DEGREES)} ${fixed(x)} ${fixed(y)})`;
}
