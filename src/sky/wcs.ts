import { InputError } from '../units/input-error.ts';
import type { CelestialWcs } from './wcs-types.ts';

const radian = Math.PI / 180;

type Vector = readonly [number, number, number];

/** Unit vectors at a point of the sky: toward it, toward east and toward north of it. */
interface SkyAxes {
  readonly toward: Vector;
  readonly east: Vector;
  readonly north: Vector;
}

/** A point of the sky, degrees. */
export interface SkyPoint {
  readonly raDeg: number;
  readonly decDeg: number;
}

/** Offsets from a centre as direction cosines (SIN projection), rad for small angles. */
export interface SkyOffset {
  readonly north: number;
  readonly east: number;
}

/**
 * The sky point of a pixel, whose numbers count from 1 and need not be whole. NaN where a SIN
 * projection has no sky there. Source: Calabretta & Greisen 2002, sections 5.1.3 and 5.1.5.
 */
export function skyFromPixel(wcs: CelestialWcs, pixelX: number, pixelY: number): SkyPoint {
  const [x, y, z] = directionFromPixel(wcs, skyAxes(wcs.raDeg, wcs.decDeg), pixelX, pixelY);
  const raDeg = Math.atan2(y, x) / radian;
  return { raDeg: raDeg < 0 ? raDeg + 360 : raDeg, decDeg: Math.atan2(z, Math.hypot(x, y)) / radian };
}

/**
 * The pixel (from 1, not rounded) of a sky point; NaN where the projection does not reach it, that
 * is 90 deg or more from the reference point. Throws InputError where the matrix has no inverse.
 */
export function pixelFromSky(wcs: CelestialWcs, raDeg: number, decDeg: number): { pixelX: number; pixelY: number } {
  const axes = skyAxes(wcs.raDeg, wcs.decDeg);
  const point = skyAxes(raDeg, decDeg).toward;
  const depth = dot(point, axes.toward);
  const scale = depth > 0 ? 1 / (wcs.projection === 'TAN' ? depth : 1) / radian : NaN;
  const planeX = dot(point, axes.east) * scale;
  const planeY = dot(point, axes.north) * scale;
  const [cd11, cd12, cd21, cd22] = wcs.cd;
  const determinant = pixelDeterminant(wcs);
  return {
    pixelX: wcs.crpixX + (cd22 * planeX - cd12 * planeY) / determinant,
    pixelY: wcs.crpixY + (cd11 * planeY - cd21 * planeX) / determinant,
  };
}

/**
 * A function from pixels (from 1) to offsets from `centre` as direction cosines, whatever the map's
 * own projection; the centre need not be the reference point, which is the default. NaN where there
 * is no sky, or it lies on the far half of the sphere.
 */
export function offsetFromPixel(
  wcs: CelestialWcs,
  centre: SkyPoint = wcs,
): (pixelX: number, pixelY: number) => SkyOffset {
  pixelDeterminant(wcs);
  const axes = skyAxes(wcs.raDeg, wcs.decDeg);
  const { toward, east, north } = skyAxes(centre.raDeg, centre.decDeg);
  return (pixelX, pixelY) => {
    const direction = directionFromPixel(wcs, axes, pixelX, pixelY);
    const visible = dot(direction, toward) > 0;
    return { north: visible ? dot(direction, north) : NaN, east: visible ? dot(direction, east) : NaN };
  };
}

/** Area of a pixel at the reference point, sr. Throws InputError where the matrix has no inverse. */
export function pixelAreaSr(wcs: CelestialWcs): number {
  return Math.abs(pixelDeterminant(wcs)) * radian * radian;
}

function pixelDeterminant({ cd }: CelestialWcs): number {
  const determinant = cd[0] * cd[3] - cd[1] * cd[2];
  if (!Number.isFinite(determinant) || determinant === 0) {
    throw new InputError(
      `the matrix from pixels to the sky has no inverse: CD1_1 ${cd[0]}, CD1_2 ${cd[1]}, CD2_1 ${cd[2]}, ` +
        `CD2_2 ${cd[3]} deg; a pixel needs an area`,
    );
  }
  return determinant;
}

/** The zenithal projections as vectors: x, y are the components along east and north of the reference. */
function directionFromPixel(wcs: CelestialWcs, axes: SkyAxes, pixelX: number, pixelY: number): Vector {
  const [cd11, cd12, cd21, cd22] = wcs.cd;
  const [dx, dy] = [pixelX - wcs.crpixX, pixelY - wcs.crpixY];
  const x = (cd11 * dx + cd12 * dy) * radian;
  const y = (cd21 * dx + cd22 * dy) * radian;
  // SIN: (x, y, sqrt(1 - x^2 - y^2)); TAN: (x, y, 1), made a unit vector.
  const r2 = x * x + y * y;
  const length = wcs.projection === 'TAN' ? Math.sqrt(1 + r2) : 1;
  const depth = wcs.projection === 'TAN' ? 1 : Math.sqrt(1 - r2);
  const component = (k: 0 | 1 | 2): number =>
    (x * axes.east[k] + y * axes.north[k] + depth * axes.toward[k]) / length;
  return [component(0), component(1), component(2)];
}

function skyAxes(raDeg: number, decDeg: number): SkyAxes {
  const [sinRa, cosRa] = [Math.sin(raDeg * radian), Math.cos(raDeg * radian)];
  const [sinDec, cosDec] = [Math.sin(decDeg * radian), Math.cos(decDeg * radian)];
  return {
    toward: [cosDec * cosRa, cosDec * sinRa, sinDec],
    east: [-sinRa, cosRa, 0],
    north: [-sinDec * cosRa, -sinDec * sinRa, cosDec],
  };
}

function dot(a: Vector, b: Vector): number {
  return a[0] * b[0] + a[1] * b[1] + a[2] * b[2];
}
