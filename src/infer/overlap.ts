import type { Galaxy } from '../scene/types.ts';
import { offsetFromPixel } from '../sky/wcs.ts';
import { InputError } from '../units/input-error.ts';
import type { DataSet } from './types.ts';

/**
 * Throws InputError where no unmasked pixel of the data shows the model's galaxy (its volume's
 * radius around its centre); a galaxy without a centre is at 0, 0, as in its own maps.
 */
export function refuseNoOverlap(data: DataSet, galaxy: Galaxy): void {
  const { wcs, nx } = data.axes;
  const { distanceKpc, volume } = galaxy;
  const offset = offsetFromPixel(wcs, galaxy.centre ?? { raDeg: 0, decDeg: 0 });
  const reach = Math.hypot(volume.radiusKpc, volume.heightKpc) / distanceKpc;
  const maps = [...data.planes, ...(data.others ?? []).filter(({ kind }) => kind === 'map')];
  const pixels = nx * data.axes.ny;
  const seen = maps.some(({ values }) =>
    values.some((value, k) => {
      if (!Number.isFinite(value)) return false;
      const p = k % pixels;
      const column = p % nx;
      const { north, east } = offset(column + 1, (p - column) / nx + 1);
      return Math.hypot(north, east) <= reach;
    }),
  );
  if (seen) return;
  const where = galaxy.centre
    ? `its centre is RA ${galaxy.centre.raDeg} deg, Dec ${galaxy.centre.decDeg} deg`
    : 'it has no centre on the sky; add `galaxy: {centre: {ra: …, dec: …}}` to its scene';
  throw new InputError(
    `the data, around RA ${wcs.raDeg} deg, Dec ${wcs.decDeg} deg, do not show the model's galaxy: ${where}`,
  );
}
