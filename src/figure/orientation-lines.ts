import type { MapPlace } from './map-place.ts';
import { frameDirection } from './map-place.ts';
import type { PanelMap } from './panel-map.ts';
import { element, fixed } from './svg.ts';
import type { OverlayInk } from './theme.ts';

/** What orientation lines show. Arrays have the pixels of the map they lie on, in its order. */
export interface OrientationLayer {
  /** Polarization angle of the electric vector, rad, north through east (IAU). */
  readonly chiRad: ArrayLike<number>;
  /** What sets the lengths: P or p; blank or 0 where no line should be. */
  readonly strength: ArrayLike<number>;
  /** Pixels from line to line; lines stand for the mean over such squares. 1/16 of the map where left out. */
  readonly spacingPixels?: number;
  /** Strength of a line as long as the spacing; the largest mean where left out. Give one to compare maps. */
  readonly fullStrength?: number;
  /** No lines below this strength. */
  readonly minimum?: number;
}

/** One line: its centre in pixels (column, row from 0), field orientation and mean strength. */
export interface OrientationLine {
  readonly column: number;
  readonly row: number;
  /** Of the magnetic field, chi + 90 deg, rad, north through east. */
  readonly fieldAngle: number;
  readonly strength: number;
}

/**
 * Field orientations averaged over squares of pixels: the mean of strength exp(2i chi), so that
 * opposite ends of a line count the same. A square more than half blank has none.
 */
export function orientationLines(map: PanelMap, layer: OrientationLayer): readonly OrientationLine[] {
  const { nx, ny } = map;
  const spacing = lineSpacing(map, layer);
  const lines: OrientationLine[] = [];
  const firstColumn = Math.floor((nx % spacing) / 2);
  for (let south = Math.floor((ny % spacing) / 2); south + spacing <= ny; south += spacing) {
    for (let east = firstColumn; east + spacing <= nx; east += spacing) {
      let [real, imaginary, sum, count] = [0, 0, 0, 0];
      for (let row = south; row < south + spacing; row++) {
        for (let k = row * nx + east; k < row * nx + east + spacing; k++) {
          const [chi, strength] = [layer.chiRad[k], layer.strength[k]];
          if (!Number.isFinite(chi) || !Number.isFinite(strength)) continue;
          real += strength * Math.cos(2 * chi);
          imaginary += strength * Math.sin(2 * chi);
          sum += strength;
          count++;
        }
      }
      const strength = sum / count;
      if (2 * count <= spacing * spacing || !(strength > (layer.minimum ?? 0))) continue;
      const middle = (spacing - 1) / 2;
      lines.push({
        column: east + middle,
        row: south + middle,
        fieldAngle: 0.5 * Math.atan2(imaginary, real) + Math.PI / 2,
        strength,
      });
    }
  }
  return lines;
}

/** The lines drawn: short strokes with a thin casing, never arrows, none shorter than 1.5 px. */
export function drawOrientation(map: PanelMap, layer: OrientationLayer, place: MapPlace, ink: OverlayInk): string {
  const lines = orientationLines(map, layer);
  const full = layer.fullStrength ?? lines.reduce((most, line) => Math.max(most, line.strength), 0);
  const longest = lineSpacing(map, layer) * map.pixelArcsec * place.pxPerArcsec;
  let path = '';
  for (const line of lines) {
    const half = (Math.min(1.3, line.strength / full) * longest) / 2;
    if (half < 0.75) continue;
    const [x, y] = place.pixel(line.column, line.row);
    const [dx, dy] = frameDirection(line.fieldAngle);
    path += `M${fixed(x - half * dx)},${fixed(y - half * dy)}L${fixed(x + half * dx)},${fixed(y + half * dy)}`;
  }
  if (!path) return '';
  const stroke = { d: path, fill: 'none', 'stroke-linecap': 'round' };
  return (
    element('path', { class: 'casing', ...stroke, stroke: ink.casing, 'stroke-width': 2.6, 'stroke-opacity': 0.55 }) +
    element('path', { class: 'orientation', ...stroke, stroke: ink.line, 'stroke-width': 1.3 })
  );
}

function lineSpacing(map: PanelMap, layer: OrientationLayer): number {
  const spacing = layer.spacingPixels ?? Math.max(map.nx, map.ny) / 16;
  return Math.max(1, Math.round(spacing));
}
