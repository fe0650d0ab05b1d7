import type { CelestialWcs } from '../sky/wcs-types.ts';
import type { Axes, Axis } from './fits-axes.ts';
import { isCelestial } from './fits-axes.ts';
import { findNumber, findString } from './fits-header.ts';
import type { Card, FitsPlace } from './fits-types.ts';
import { fitsError } from './fits-types.ts';

/** The two axes of the sky and what they say together. */
export interface CelestialAxes {
  readonly longitude: Axis;
  readonly latitude: Axis;
  readonly wcs: CelestialWcs;
}

const ALLOWED = 'allowed: RA and DEC in the projections TAN and SIN';

/**
 * The celestial coordinates of an image. Throws InputError naming the keyword where they are
 * missing, or not RA and Dec of J2000 in a plain TAN or SIN projection: galactic axes, FK4, slant
 * projections, distortions, a native pole elsewhere.
 */
export function celestialAxes({ axes, step }: Axes, cards: readonly Card[], place: FitsPlace): CelestialAxes {
  for (const { ctype, number } of axes) {
    if (!/^[GESH]L(ON|AT)(-|$)/.test(ctype)) continue;
    throw fitsError(place, `CTYPE${number} = '${ctype}': not equatorial coordinates, which are not turned here; ${ALLOWED}`);
  }
  const longitude = onlyAxis(axes, /^RA(-|$)/, 'RA', place);
  const latitude = onlyAxis(axes, /^DEC(-|$)/, 'DEC', place);
  const projection = projectionOf(longitude, place);
  if (projectionOf(latitude, place) !== projection) {
    throw fitsError(place, `CTYPE${longitude.number} = '${longitude.ctype}' and CTYPE${latitude.number} = '${latitude.ctype}' differ in projection`);
  }
  for (const { cunit, number } of [longitude, latitude]) {
    if (!/^(deg|degree|degrees|)$/i.test(cunit)) throw fitsError(place, `CUNIT${number} = '${cunit}'; allowed: deg`);
  }
  checkFrame(cards, place);
  checkParameters(cards, longitude, latitude, projection, place);
  const [x, y] = [longitude.number, latitude.number];
  const cd = [step(x, x), step(x, y), step(y, x), step(y, y)] as const;
  if (!(Math.abs(cd[0] * cd[3] - cd[1] * cd[2]) > 0)) {
    throw fitsError(place, `the pixels have no area: the matrix of steps is ${cd.join(', ')} deg (CDELT, PC or CD)`);
  }
  const wcs: CelestialWcs = {
    projection,
    raDeg: longitude.crval,
    decDeg: latitude.crval,
    crpixX: longitude.crpix,
    crpixY: latitude.crpix,
    cd,
  };
  return { longitude, latitude, wcs };
}

function onlyAxis(axes: readonly Axis[], pattern: RegExp, name: string, place: FitsPlace): Axis {
  const found = axes.filter(({ ctype }) => pattern.test(ctype));
  if (found.length === 1) return found[0];
  const given = axes.map(({ number, ctype }) => `CTYPE${number} = '${ctype}'`).join(', ');
  throw fitsError(place, `${found.length} axes of ${name} among ${given}; ${ALLOWED}`);
}

function projectionOf({ ctype, number }: Axis, place: FitsPlace): 'SIN' | 'TAN' {
  const code = ctype.replace(/^(RA|DEC)-*/, '');
  if (isCelestial(ctype) && (code === 'SIN' || code === 'TAN')) return code;
  throw fitsError(place, `CTYPE${number} = '${ctype}': projection ${code || '(none)'}; ${ALLOWED}`);
}

function checkFrame(cards: readonly Card[], place: FitsPlace): void {
  const equinox = findNumber(cards, 'EQUINOX', place) ?? findNumber(cards, 'EPOCH', place);
  const given = findString(cards, 'RADESYS', place) ?? findString(cards, 'RADECSYS', place);
  // The default by the equinox (Calabretta & Greisen 2002, section 3.1).
  const frame = given?.trim().toUpperCase() || (equinox === undefined ? 'ICRS' : equinox < 1984 ? 'FK4' : 'FK5');
  if (frame !== 'ICRS' && frame !== 'FK5') {
    throw fitsError(place, `RADESYS ${frame}${equinox === undefined ? '' : `, EQUINOX = ${equinox}`}; allowed: ICRS, or FK5 of 2000`);
  }
  if (frame === 'FK5' && equinox !== undefined && equinox !== 2000) {
    throw fitsError(place, `EQUINOX = ${equinox}; allowed: 2000`);
  }
}

function checkParameters(
  cards: readonly Card[],
  longitude: Axis,
  latitude: Axis,
  projection: string,
  place: FitsPlace,
): void {
  if (Math.abs(latitude.crval) > 90) throw fitsError(place, `CRVAL${latitude.number} = ${latitude.crval}; allowed: -90 to 90 deg`);
  // Of a zenithal projection (Calabretta & Greisen 2002, section 2.2).
  const pole = findNumber(cards, 'LONPOLE', place) ?? (latitude.crval >= 90 ? 0 : 180);
  if (Math.abs(Math.abs(pole) - 180) > 1e-9) throw fitsError(place, `LONPOLE = ${pole}; allowed: 180`);
  const defaults = new Map<string, readonly number[]>([
    [`PV${longitude.number}_0`, [0]],
    [`PV${longitude.number}_1`, [0]],
    [`PV${longitude.number}_2`, [90]],
    [`PV${longitude.number}_3`, [180, -180]],
  ]);
  for (const { keyword } of cards) {
    const match = /^PV(\d+)_(\d+)$/.exec(keyword);
    if (match === null) continue;
    const axis = Number(match[1]);
    if (axis !== longitude.number && axis !== latitude.number) continue;
    // LATPOLE, which a zenithal projection does not need.
    if (axis === longitude.number && match[2] === '4') continue;
    const value = findNumber(cards, keyword, place);
    const allowed = defaults.get(keyword) ?? [0];
    if (value === undefined || allowed.includes(value)) continue;
    throw fitsError(place, `${keyword} = ${value}: a ${projection} projection with parameters is not read; allowed: ${allowed[0]}`);
  }
  const distortion = cards.find(({ keyword }) => /^(A|B)_ORDER$|^(CPDIS|CQDIS)\d$|^D2IMDIS\d$/.test(keyword));
  if (distortion) throw fitsError(place, `${distortion.keyword}: distorted coordinates are not read`);
}
