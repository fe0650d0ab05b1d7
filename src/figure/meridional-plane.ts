import { barLabel, colourBar } from './colour-bar.ts';
import { sharedColourScale } from './colour-scale.ts';
import { drawContours } from './contour-lines.ts';
import { mapImage } from './map-image.ts';
import type { PanelMap } from './panel-map.ts';
import { clipped, element, moved, polyline, svgDocument, textElement } from './svg.ts';
import { lightTheme, overlayInk, type Theme } from './theme.ts';
import { tidyTicks } from './ticks.ts';

/** An axisymmetric field over (r, z), as the solver gives it, [i + j · radialPoints]; z symmetric about 0. */
export interface MeridionalPlane {
  readonly radialStepKpc: number;
  readonly verticalStepKpc: number;
  readonly radialPoints: number;
  readonly verticalPoints: number;
  /** A_phi, uG kpc. */
  readonly potential: Float64Array;
  /** B_phi, uG. */
  readonly azimuthal: Float64Array;
}

const LONGEST = 620;
const TALLEST = 460;
/** Poloidal lines: line n of so many encloses the share (n/count)^2 of the largest flux, as even steps of radius in an even field do. */
const LINES = 14;
const [LEFT, TOP, BOTTOM, BAR_ROOM] = [52, 48, 44, 76];

/**
 * The meridional plane: colours of B_phi and lines of the poloidal field (r A_phi constant), as one SVG
 * file. Fluxes grow as squares from line to line, so that weak outer parts are seen.
 */
export function meridionalSvg(plane: MeridionalPlane, title: string, notes: readonly string[], theme: Theme = lightTheme): string {
  const { radialPoints: nr, verticalPoints: nz } = plane;
  const [radius, height] = [(nr - 1) * plane.radialStepKpc, ((nz - 1) / 2) * plane.verticalStepKpc];
  const perKpc = Math.min(LONGEST / radius, TALLEST / (2 * height));
  const [width, tall] = [radius * perKpc, 2 * height * perKpc];
  const map: PanelMap = { values: plane.azimuthal, nx: nr, ny: nz, pixelArcsec: 1, unit: 'uG', title: 'azimuthal field', kind: 'signed' };
  const scale = sharedColourScale([map]);
  // Nodes stand at the corners of the frame, pixels are drawn about them.
  const [cellWidth, cellHeight] = [width / (nr - 1), tall / (nz - 1)];
  const image = moved(mapImage(map, scale, width + cellWidth, tall + cellHeight, theme.rule), -cellWidth / 2, -cellHeight / 2);
  const flux = plane.potential.map((value, node) => value * (node % nr) * plane.radialStepKpc);
  const largest = flux.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
  const ladder = Array.from({ length: LINES }, (_, k) => largest * ((k + 0.5) / LINES) ** 2);
  const place = { pixel: (column: number, row: number): readonly [number, number] => [column * cellWidth, tall - row * cellHeight] };
  const lines = [1, -1].map((sign) => drawContours(map, { values: flux.map((value) => sign * value), levels: ladder }, place, overlayInk('signed'))).join('');
  const bar = colourBar(scale, barLabel(scale), Math.max(90, tall - 26), true, theme);
  const body =
    textElement(LEFT, 19, title, { 'font-size': 13, 'font-weight': 600 }) +
    textElement(LEFT, 36, 'azimuthal field (colours) and poloidal field lines', { fill: theme.soft }) +
    moved(clipped(image + lines, width, tall) + axes(radius, height, width, tall, theme), LEFT, TOP) +
    moved(bar.body, LEFT + width + 14, TOP) +
    notes.map((note, k) => textElement(LEFT, TOP + tall + BOTTOM + 10 + 14 * k, note, { fill: theme.soft })).join('');
  const drawing = { width: LEFT + Math.max(width, 420) + BAR_ROOM, height: TOP + tall + BOTTOM + 8 + 14 * notes.length + 8, body };
  return svgDocument(drawing, { title, description: notes.join(' '), ink: theme.ink, paper: theme.paper });
}

function axes(radius: number, height: number, width: number, tall: number, theme: Theme): string {
  const soft = { 'font-size': 10, fill: theme.soft };
  let [marks, texts] = ['', ''];
  for (const { value, label } of tidyTicks(0, radius, width / 60)) {
    const x = (value / radius) * width;
    marks += polyline([[x, tall], [x, tall + 4]]);
    texts += textElement(x, tall + 15, label, { ...soft, 'text-anchor': 'middle' });
  }
  for (const { value, label } of tidyTicks(-height, height, tall / 40)) {
    const y = (tall * (height - value)) / (2 * height);
    marks += polyline([[-4, y], [0, y]]);
    texts += textElement(-7, y + 3.5, label, { ...soft, 'text-anchor': 'end' });
  }
  return (
    element('rect', { width, height: tall, fill: 'none', stroke: theme.soft, 'stroke-width': 0.8 }) +
    element('path', { d: marks, stroke: theme.soft, 'stroke-width': 0.8, fill: 'none' }) +
    texts +
    textElement(width / 2, tall + 32, 'r (kpc)', { fill: theme.soft, 'text-anchor': 'middle' }) +
    textElement(0, 0, 'z (kpc)', { fill: theme.soft, 'text-anchor': 'middle', transform: `translate(-34,${(tall / 2).toFixed(1)}) rotate(-90)` })
  );
}
