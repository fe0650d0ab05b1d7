import type { Beam } from '../scene/types.ts';
import type { ColourKind } from './palette.ts';

/**
 * A map to draw, in the order of FITS: index = row * nx + column, row 0 south, column 0 east (drawn
 * at the left). NaN is blank.
 */
export interface PanelMap {
  readonly values: ArrayLike<number>;
  readonly nx: number;
  readonly ny: number;
  readonly pixelArcsec: number;
  /** Pixel at the galaxy's distance; undefined where that is not known (no kpc scale bar then). */
  readonly pixelKpc?: number;
  /** Unit of `values`, as in our files. */
  readonly unit: string;
  readonly title: string;
  readonly kind: ColourKind;
  readonly beam?: Beam;
  /** Pixel of the offsets' zero, 1-based as in FITS; (n+1)/2 where left out. */
  readonly crpixX?: number;
  readonly crpixY?: number;
}

/** Reference pixel counted from 0: column and row of the galaxy's centre. */
export function centrePixel(map: PanelMap): { readonly column: number; readonly row: number } {
  return { column: (map.crpixX ?? (map.nx + 1) / 2) - 1, row: (map.crpixY ?? (map.ny + 1) / 2) - 1 };
}

/** Throws where the number of values and the size do not agree. */
export function assertMapShape(map: PanelMap): void {
  if (map.values.length !== map.nx * map.ny) {
    throw new RangeError(`map "${map.title}" has ${map.values.length} values for ${map.nx} x ${map.ny} pixels`);
  }
}
