import { centrePixel } from './panel-map.ts';
import type { PanelMap } from './panel-map.ts';

/** Where the sky lies in a map's frame of `width` x `height` px: x right (west), y down (south). */
export interface MapPlace {
  readonly width: number;
  readonly height: number;
  readonly pxPerArcsec: number;
  /** Frame position of a pixel's centre; column and row from 0, fractions allowed. */
  readonly pixel: (column: number, row: number) => readonly [number, number];
  /** Frame position of an offset from the galaxy's centre, arcsec. */
  readonly offset: (eastArcsec: number, northArcsec: number) => readonly [number, number];
}

/** Fits a map into a box of `boxWidth` x `boxHeight` px with square pixels. */
export function placeMap(map: PanelMap, boxWidth: number, boxHeight: number): MapPlace {
  const pxPerPixel = Math.min(boxWidth / map.nx, boxHeight / map.ny);
  const height = map.ny * pxPerPixel;
  const centre = centrePixel(map);
  const pixel = (column: number, row: number): readonly [number, number] => [
    (column + 0.5) * pxPerPixel,
    height - (row + 0.5) * pxPerPixel,
  ];
  return {
    width: map.nx * pxPerPixel,
    height,
    pxPerArcsec: pxPerPixel / map.pixelArcsec,
    pixel,
    offset: (east, north) => pixel(centre.column - east / map.pixelArcsec, centre.row + north / map.pixelArcsec),
  };
}

/** Direction in the frame of a position angle (rad, north through east): north is up, east is left. */
export function frameDirection(positionAngle: number): readonly [number, number] {
  return [-Math.sin(positionAngle), -Math.cos(positionAngle)];
}
