import { InputError } from '../units/input-error.ts';
import type { Scene } from '../scene/types.ts';
import type { RayBundle } from '../ray/types.ts';
import type { SkyGrid, StokesCube } from './types.ts';
import type { CelestialWcs } from './wcs-types.ts';
import { offsetFromPixel } from './wcs.ts';
import type { SkyPoint } from './wcs.ts';

/** Radians per arcsec. */
export const arcsec = Math.PI / 648_000;

/** The image grid of a scene: north up, east left, the galaxy's centre at pixel (n + 1)/2. */
export function gridFromScene(scene: Scene): SkyGrid {
  const { nx, ny, pixelArcsec } = scene.observation.image;
  const { distanceKpc, centre } = scene.galaxy;
  return {
    nx,
    ny,
    pixelArcsec,
    pixelKpc: pixelArcsec * arcsec * distanceKpc,
    raDeg: centre?.raDeg ?? 0,
    decDeg: centre?.decDeg ?? 0,
    crpixX: (nx + 1) / 2,
    crpixY: (ny + 1) / 2,
  };
}

/** The celestial axes of a grid: SIN, CDELT1 < 0. */
export function wcsFromGrid(grid: SkyGrid): CelestialWcs {
  const cdelt = grid.pixelArcsec / 3600;
  const { raDeg, decDeg, crpixX, crpixY } = grid;
  return { projection: 'SIN', raDeg, decDeg, crpixX, crpixY, cd: [-cdelt, 0, 0, cdelt] };
}

/** Offsets of a grid's pixel centres from its reference pixel, kpc: the rays of its image. */
export function gridOffsetsKpc(grid: SkyGrid): RayBundle {
  const { nx, ny, pixelKpc, crpixX, crpixY } = grid;
  const northKpc = new Float64Array(nx * ny);
  const eastKpc = new Float64Array(nx * ny);
  for (let row = 0, k = 0; row < ny; row++) {
    for (let column = 0; column < nx; column++, k++) {
      northKpc[k] = (row + 1 - crpixY) * pixelKpc;
      eastKpc[k] = (crpixX - 1 - column) * pixelKpc;
    }
  }
  return { northKpc, eastKpc };
}

/**
 * Offsets of the pixel centres of any map from `centre` (default: its reference point): direction
 * cosines times distance, kpc, [row * nx + column]. NaN where the projection has no sky.
 */
export function offsetsKpc(
  wcs: CelestialWcs,
  nx: number,
  ny: number,
  distanceKpc: number,
  centre?: SkyPoint,
): RayBundle {
  const northKpc = new Float64Array(nx * ny);
  const eastKpc = new Float64Array(nx * ny);
  const offset = offsetFromPixel(wcs, centre);
  for (let row = 0, k = 0; row < ny; row++) {
    for (let column = 0; column < nx; column++, k++) {
      const { north, east } = offset(column + 1, row + 1);
      northKpc[k] = north * distanceKpc;
      eastKpc[k] = east * distanceKpc;
    }
  }
  return { northKpc, eastKpc };
}

/** A grid grown by `margin` pixels on each side, about the same sky; the reverse of `cropCube`. */
export function growGrid(grid: SkyGrid, margin: number): SkyGrid {
  return {
    ...grid,
    nx: grid.nx + 2 * margin,
    ny: grid.ny + 2 * margin,
    crpixX: grid.crpixX + margin,
    crpixY: grid.crpixY + margin,
  };
}

/** Planes [plane * ny * nx + row * nx + column] without `margin` pixels on each side. */
export function cropPlanes(planes: Float64Array, nx: number, ny: number, margin: number): Float64Array {
  const [innerX, innerY] = [nx - 2 * margin, ny - 2 * margin];
  const count = planes.length / (nx * ny);
  const cropped = new Float64Array(count * innerX * innerY);
  for (let plane = 0; plane < count; plane++) {
    for (let row = 0; row < innerY; row++) {
      const start = (plane * ny + row + margin) * nx + margin;
      cropped.set(planes.subarray(start, start + innerX), (plane * innerY + row) * innerX);
    }
  }
  return cropped;
}

/** A cube without `margin` pixels on each side. Throws InputError where nothing would be left. */
export function cropCube(cube: StokesCube, margin: number): StokesCube {
  const { nx, ny } = cube.grid;
  if (2 * margin >= Math.min(nx, ny)) {
    throw new InputError(`a map of ${nx} x ${ny} pixels has no inside left without a margin of ${margin} pixels`);
  }
  const crop = (planes: Float64Array): Float64Array => cropPlanes(planes, nx, ny, margin);
  return { ...cube, grid: growGrid(cube.grid, -margin), I: crop(cube.I), Q: crop(cube.Q), U: crop(cube.U) };
}
