import { InputError } from '../units/input-error.ts';
import type { Beam } from '../scene/types.ts';
import { beamConvolver, pixelBeam } from './beam.ts';
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
  const { nx, ny } = cube.grid;
  const smooth = beamConvolver(pixelBeam(checkedBeam(missingWavelengths, cube.grid), wcsFromGrid(cube.grid).cd), nx, ny);
  const [I, Q, U] = [cube.I, cube.Q, cube.U].map((planes) => planes.slice());
  const subtract = (planes: Float64Array, broad: Float64Array, start: number): void => {
    for (let k = 0; k < broad.length; k++) planes[start + k] -= broad[k];
  };
  for (let start = 0; start < I.length; start += nx * ny) {
    const [broadI, broadQ, broadU] = [I, Q, U].map((planes) => planes.slice(start, start + nx * ny));
    smooth(broadQ, broadU);
    smooth(broadI);
    subtract(I, broadI, start);
    subtract(Q, broadQ, start);
    subtract(U, broadU, start);
  }
  return { ...cube, I, Q, U };
}

function checkedBeam(missingWavelengths: number, { pixelArcsec }: SkyGrid): Beam {
  const beam = missingBeam(missingWavelengths);
  if (beam.majorArcsec >= pixelArcsec) return beam;
  throw new InputError(
    `spacings below ${Number(missingWavelengths.toPrecision(6))} wavelengths are missing: on pixels of ${Number(pixelArcsec.toPrecision(6))} arcsec ` +
      'nothing would be left; take a smaller number or smaller pixels',
  );
}
