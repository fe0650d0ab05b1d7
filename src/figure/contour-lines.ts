import { contours } from 'd3-contour';
import type { MapPlace } from './map-place.ts';
import type { PanelMap } from './panel-map.ts';
import { element, polyline } from './svg.ts';
import type { OverlayInk } from './theme.ts';

/** Contours of an array with the pixels of the map beneath; levels in the array's unit. */
export interface ContourLayer {
  readonly values: ArrayLike<number>;
  readonly levels: readonly number[];
}

/** Levels first, 2 first, 4 first … up to `largest`: the usual ladder above the noise. */
export function doublingLevels(first: number, largest: number): readonly number[] {
  const levels: number[] = [];
  if (first > 0) for (let level = first; level < largest; level *= 2) levels.push(level);
  return levels;
}

/**
 * Contours between pixel centres by linear interpolation (marching squares). Edges of the map and of
 * blank pixels are not contours: the lines stop there.
 */
export function drawContours(map: PanelMap, layer: ContourLayer, place: Pick<MapPlace, 'pixel'>, ink: OverlayInk): string {
  const { nx, ny } = map;
  const shapes = contours().size([nx, ny]).thresholds([...layer.levels])(Array.from(layer.values));
  let path = '';
  for (const shape of shapes) {
    for (const ring of shape.coordinates.flat()) {
      for (const run of openRuns(ring, layer.values, nx, ny)) {
        path += polyline(run.map(([x, y]) => place.pixel(x - 0.5, y - 0.5)));
      }
    }
  }
  if (!path) return '';
  const stroke = { d: path, fill: 'none', 'stroke-linejoin': 'round' };
  return (
    element('path', { class: 'casing', ...stroke, stroke: ink.casing, 'stroke-width': 1.6, 'stroke-opacity': 0.35 }) +
    element('path', { class: 'contour', ...stroke, stroke: ink.line, 'stroke-width': 0.7, 'stroke-opacity': 0.85 })
  );
}

/** The parts of a ring (last point = first) that lie inside the map and away from blanks. */
function openRuns(
  ring: readonly number[][],
  values: ArrayLike<number>,
  nx: number,
  ny: number,
): readonly (readonly number[][])[] {
  const inside = ring.map(([x, y]) => isInside(x, y, values, nx, ny));
  const runs: number[][][] = [];
  let run: number[][] = [];
  const close = (): void => {
    if (run.length > 1) runs.push(run);
    run = [];
  };
  ring.forEach((point, k) => (inside[k] ? run.push(point) : close()));
  close();
  return runs;
}

function isInside(x: number, y: number, values: ArrayLike<number>, nx: number, ny: number): boolean {
  if (x < 0.5 || y < 0.5 || x > nx - 0.5 || y > ny - 0.5) return false;
  const near = 1e-6;
  for (let row = Math.floor(y - 0.5 - near); row <= Math.ceil(y - 0.5 + near); row++) {
    for (let column = Math.floor(x - 0.5 - near); column <= Math.ceil(x - 0.5 + near); column++) {
      if (row < 0 || column < 0 || row >= ny || column >= nx) continue;
      if (!Number.isFinite(values[row * nx + column])) return false;
    }
  }
  return true;
}
