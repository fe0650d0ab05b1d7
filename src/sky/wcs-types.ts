/**
 * The celestial part of a FITS header as plain numbers (Calabretta & Greisen 2002): which point of
 * the sky each pixel shows. Offsets from the reference pixel, times `cd`, are the projection-plane
 * coordinates (x, y) in degrees, x to the east and y to the north; LONPOLE is 180.
 */
export interface CelestialWcs {
  readonly projection: 'SIN' | 'TAN';
  /** Of the reference point: right ascension and declination, ICRS, degrees. */
  readonly raDeg: number;
  readonly decDeg: number;
  /** Reference pixel, 1-based as in FITS; x counts columns, y counts rows. */
  readonly crpixX: number;
  readonly crpixY: number;
  /** Degrees per pixel: x by column, x by row, y by column, y by row (CD1_1, CD1_2, CD2_1, CD2_2). */
  readonly cd: readonly [number, number, number, number];
}
