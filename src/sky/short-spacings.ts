import { InputError } from '../units/input-error.ts';
import type { Beam } from '../scene/types.ts';
import { beamConvolver, pixelBeam, type StokesPlanes } from './beam.ts';
import { arcsec, wcsFromGrid } from './grid.ts';
import type { SkyGrid, StokesCube } from './types.ts';

/**
 * The broad structure that an interferometer without short spacings does not see, as the beam by
 * which a map is smoothed and then subtracted from itself: a Gaussian high-pass in the uv plane,
 * 1 - exp(-ln 2 (u/u0)^2), which is 1/2 at u0 = `missingWavelengths`. Its FWHM is 2 ln 2/(pi u0). Own definition.
 */
export function missingBeam(missingWavelengths: number): Beam {
  const fwhmArcsec = (2 * Math.LN2) / (Math.PI * missingWavelengths) / arcsec;
  return { majorArcsec: fwhmArcsec, minorArcsec: fwhmArcsec, angle: 0 };
}

/**
 * A cube without what spacings below `missingWavelengths` would show; the same in I, Q and U. Beyond
 * its edges the sky is taken as empty: bring a margin. Throws InputError where nothing wider than a
 * pixel would be left.
 */
export function removeShortSpacings(cube: StokesCube, missingWavelengths: number): StokesCube {
  const seen = { I: cube.I.slice(), Q: cube.Q.slice(), U: cube.U.slice() };
  highPassPlanes(seen, missingWavelengths, cube.grid);
  return { ...cube, ...seen };
}

/** The same for any planes of a grid, in place. */
export function highPassPlanes(stokes: StokesPlanes, missingWavelengths: number, grid: SkyGrid): void {
  const { nx, ny } = grid;
  const smooth = beamConvolver(pixelBeam(checkedBeam(missingWavelengths, grid), wcsFromGrid(grid).cd), nx, ny);
  for (const planes of [stokes.I, stokes.Q, stokes.U]) {
    for (let start = 0; start < planes.length; start += nx * ny) {
      const broad = planes.slice(start, start + nx * ny);
      smooth(broad);
      for (let k = 0; k < broad.length; k++) planes[start + k] -= broad[k];
    }
  }
}

function checkedBeam(missingWavelengths: number, { pixelArcsec }: SkyGrid): Beam {
  const beam = missingBeam(missingWavelengths);
  if (beam.majorArcsec >= pixelArcsec) return beam;
  throw new InputError(
    `spacings below ${Number(missingWavelengths.toPrecision(6))} wavelengths are missing: on pixels of ${Number(pixelArcsec.toPrecision(6))} arcsec ` +
      'nothing would be left; take a smaller number or smaller pixels',
  );
}
