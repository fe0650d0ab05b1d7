import type { Beam } from '../scene/types.ts';
import type { SkyGrid } from '../sky/types.ts';
import type { CelestialWcs } from '../sky/wcs-types.ts';
import type { Card } from './fits-types.ts';

/** Which sky a map shows: its size in pixels and its celestial coordinates. */
export interface MapSky {
  readonly nx: number;
  readonly ny: number;
  readonly wcs: CelestialWcs;
}

/** Names of Stokes parameters by their FITS codes 1 to 4 (Greisen & Calabretta 2002, table 7). */
export const STOKES_NAMES = ['I', 'Q', 'U', 'V'] as const;
export type StokesName = (typeof STOKES_NAMES)[number];

export const DEPTH_AXIS = 'FDEP';
export const CHANNEL_TABLE = 'CHANNELS';
export const DEGREES_PER_RADIAN = 180 / Math.PI;
export const ARCSEC_PER_DEGREE = 3600;

/** A linear axis beside the two of the sky, with what else its header needs. */
export interface ThirdAxis {
  readonly ctype: string;
  readonly cunit: string;
  readonly crpix: number;
  readonly crval: number;
  readonly cdelt: number;
  readonly length: number;
  readonly cards?: readonly Card[];
}

/** The sky of a scene's grid: SIN projection, north up, east left. */
export function skyOfGrid(grid: SkyGrid): MapSky {
  const pixelDeg = grid.pixelArcsec / ARCSEC_PER_DEGREE;
  const { raDeg, decDeg, crpixX, crpixY } = grid;
  const wcs: CelestialWcs = { projection: 'SIN', raDeg, decDeg, crpixX, crpixY, cd: [-pixelDeg, 0, 0, pixelDeg] };
  return { nx: grid.nx, ny: grid.ny, wcs };
}

/** The coordinate cards of a map or cube: CDELT where rows and columns run along RA and Dec, else CD. */
export function coordinateCards(wcs: CelestialWcs, third?: ThirdAxis): Card[] {
  const [xx, xy, yx, yy] = wcs.cd;
  const axes = [
    { ctype: `RA---${wcs.projection}`, cunit: 'deg', crpix: wcs.crpixX, crval: wcs.raDeg, cdelt: xx },
    { ctype: `DEC--${wcs.projection}`, cunit: 'deg', crpix: wcs.crpixY, crval: wcs.decDeg, cdelt: yy },
    ...(third ? [third] : []),
  ];
  const isAligned = xy === 0 && yx === 0;
  const rotation: Card[] = isAligned
    ? []
    : [
        { keyword: 'CD1_1', value: xx },
        { keyword: 'CD1_2', value: xy },
        { keyword: 'CD2_1', value: yx },
        { keyword: 'CD2_2', value: yy },
        ...(third ? [{ keyword: 'CD3_3', value: third.cdelt }] : []),
      ];
  return [
    { keyword: 'WCSAXES', value: axes.length },
    ...axes.flatMap(({ ctype, cunit, crpix, crval, cdelt }, i): Card[] => [
      { keyword: `CTYPE${i + 1}`, value: ctype },
      { keyword: `CUNIT${i + 1}`, value: cunit },
      { keyword: `CRPIX${i + 1}`, value: crpix },
      { keyword: `CRVAL${i + 1}`, value: crval },
      ...(isAligned ? [{ keyword: `CDELT${i + 1}`, value: cdelt }] : []),
    ]),
    ...rotation,
    ...(third?.cards ?? []),
    { keyword: 'RADESYS', value: 'ICRS' },
  ];
}

/** BMAJ, BMIN and BPA in degrees, north through east (common practice, not in the standard). */
export function beamCards(beam: Beam | undefined): Card[] {
  if (beam === undefined) return [];
  return [
    { keyword: 'BMAJ', value: beam.majorArcsec / ARCSEC_PER_DEGREE, comment: '[deg] FWHM of the beam' },
    { keyword: 'BMIN', value: beam.minorArcsec / ARCSEC_PER_DEGREE, comment: '[deg]' },
    { keyword: 'BPA', value: beam.angle * DEGREES_PER_RADIAN, comment: '[deg] of the major axis, N through E' },
  ];
}

/** How the signs of Q and U are meant, and of depths: the same words in every output. */
export function conventionCards(): Card[] {
  return [
    { keyword: 'POLCCONV', value: 'IAU', comment: 'convention of polarization angles' },
    {
      keyword: 'COMMENT',
      comment:
        'Polarization follows the convention of the IAU (1973): the angle chi of E runs from north through ' +
        'east, Q = P cos 2 chi, U = P sin 2 chi. Faraday depth is positive where the field points to the observer.',
    },
  ];
}
