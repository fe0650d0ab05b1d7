import type { Beam } from '../scene/types.ts';
import { pixelAreaSr } from '../sky/wcs.ts';
import type { CelestialWcs } from '../sky/wcs-types.ts';

const arcsecPerDegree = 3600;
const arcsecPerRadian = 648_000 / Math.PI;

/** Which sky each pixel of a map shows, and how many there are. */
export interface PixelAxes {
  readonly wcs: CelestialWcs;
  readonly nx: number;
  readonly ny: number;
}

/** Solid angle of a Gaussian beam in pixels: pi/(4 ln 2) major minor / pixel area. */
export function beamPixels({ wcs }: PixelAxes, { majorArcsec, minorArcsec }: Beam): number {
  return ((Math.PI / (4 * Math.LN2)) * majorArcsec * minorArcsec) / (pixelAreaSr(wcs) * arcsecPerRadian ** 2);
}

/**
 * Linear map from (column, row), both from 0, to the principal axes of a beam, each in units of its
 * FWHM, so that the beam is exp(-4 ln 2 (xi^2 + eta^2)): xi = xi[0] column + xi[1] row, eta likewise.
 */
export interface BeamAxes {
  readonly xi: readonly [number, number];
  readonly eta: readonly [number, number];
}

/** The beam's principal axes on a grid; the major axis at `angle` from north through east. */
export function beamAxes({ wcs }: PixelAxes, beam: Beam): BeamAxes {
  const cos = Math.cos(beam.angle);
  const sin = Math.sin(beam.angle);
  const [eastColumn, eastRow, northColumn, northRow] = wcs.cd.map((degrees) => degrees * arcsecPerDegree);
  const along = (north: number, east: number): number => (north * cos + east * sin) / beam.majorArcsec;
  const across = (north: number, east: number): number => (east * cos - north * sin) / beam.minorArcsec;
  return {
    xi: [along(northColumn, eastColumn), along(northRow, eastRow)],
    eta: [across(northColumn, eastColumn), across(northRow, eastRow)],
  };
}

/** True where two beams, or their absence, are the same. */
export function sameBeam(a: Beam | undefined, b: Beam | undefined): boolean {
  if (!a || !b) return a === b;
  return a.majorArcsec === b.majorArcsec && a.minorArcsec === b.minorArcsec && a.angle === b.angle;
}
