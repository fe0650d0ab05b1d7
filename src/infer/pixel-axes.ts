import type { Beam } from '../scene/types.ts';
import type { SkyGrid } from '../sky/types.ts';

/** Where the pixels of a map lie: offsets on the sky, arcsec, linear in column and row (both from 0). */
export interface PixelAxes {
  readonly nx: number;
  readonly ny: number;
  /** [of column 0 and row 0, per column, per row] */
  readonly northArcsec: readonly [number, number, number];
  readonly eastArcsec: readonly [number, number, number];
}

/** The axes of a sky grid: offsets from its reference pixel, row 0 south, column 0 east. */
export function pixelAxes(grid: SkyGrid): PixelAxes {
  const { nx, ny, pixelArcsec, crpixX, crpixY } = grid;
  return {
    nx,
    ny,
    northArcsec: [(1 - crpixY) * pixelArcsec, 0, pixelArcsec],
    eastArcsec: [(crpixX - 1) * pixelArcsec, -pixelArcsec, 0],
  };
}

/** Area of a pixel, arcsec^2. */
export function pixelAreaArcsec2(axes: PixelAxes): number {
  const [, northColumn, northRow] = axes.northArcsec;
  const [, eastColumn, eastRow] = axes.eastArcsec;
  return Math.abs(northColumn * eastRow - northRow * eastColumn);
}

/** Solid angle of a Gaussian beam, arcsec^2: pi/(4 ln 2) major minor. */
export function beamAreaArcsec2(beam: Beam): number {
  return (Math.PI / (4 * Math.LN2)) * beam.majorArcsec * beam.minorArcsec;
}

/**
 * Linear map from (column, row) to the principal axes of a beam, each in units of its FWHM, so that
 * the beam is exp(-4 ln 2 (xi^2 + eta^2)): xi = xi[0] + xi[1] column + xi[2] row, eta likewise.
 */
export interface BeamAxes {
  readonly xi: readonly [number, number, number];
  readonly eta: readonly [number, number, number];
}

/** The beam's principal axes on a grid; the major axis at `angle` from north through east. */
export function beamAxes(axes: PixelAxes, beam: Beam): BeamAxes {
  const cos = Math.cos(beam.angle);
  const sin = Math.sin(beam.angle);
  const along = (north: number, east: number): number => (north * cos + east * sin) / beam.majorArcsec;
  const across = (north: number, east: number): number => (east * cos - north * sin) / beam.minorArcsec;
  const { northArcsec: n, eastArcsec: e } = axes;
  return {
    xi: [along(n[0], e[0]), along(n[1], e[1]), along(n[2], e[2])],
    eta: [across(n[0], e[0]), across(n[1], e[1]), across(n[2], e[2])],
  };
}
