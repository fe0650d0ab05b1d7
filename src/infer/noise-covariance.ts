import { InputError } from '../units/input-error.ts';
import { bandedMatrix } from './banded-cholesky.ts';
import type { BandedMatrix } from './banded-cholesky.ts';
import { windowRadius } from './lattice.ts';
import type { Lattice } from './lattice.ts';
import type { BeamAxes } from './pixel-axes.ts';

/** Spacing of the sources of noise, FWHM: the sum over them replaces an integral to 3e-6. */
const sourceSpacing = 0.25;
/** Sources farther than this from a pixel do not reach it (1e-6 of the peak). */
const sourceReach = 1.6;
/** Window means farther apart than this many lattice steps share no noise (5e-8 of the variance). */
const farthestSteps = 4;
/** Entries of the covariance that a machine of a few gigabytes can hold. */
const mostEntries = 1e8;

/**
 * Covariance of the window means of noise whose rms is 1 and whose autocorrelation is the beam's
 * shape, rho = exp(-4 ln 2 d^2/FWHM^2), over the unmasked pixels of each window.
 *
 * Own method: such noise is white noise on a fine lattice of sources, seen through a Gaussian of
 * FWHM/sqrt 2, since that Gaussian's autocorrelation is rho. With B[a][u] = the share of source u in
 * the mean of window a, the covariance is B B^T: exact for any mask, positive by construction, and
 * its cost does not grow with the number of pixels in a beam. Throws InputError where it is too large.
 */
export function windowCovariance(lattice: Lattice, axes: BeamAxes, nx: number): BandedMatrix {
  const { count } = lattice;
  const neighbours = neighbourTable(lattice);
  let band = 0;
  neighbours.forEach((list, a) => list.forEach((b) => (band = Math.max(band, a - b))));
  if (count * (band + 1) > mostEntries) {
    throw new InputError(
      `the maps hold ${count} beams, too many for their noise covariance; ` +
        'mask the sky around the galaxy, cut the maps or smooth them to a wider beam',
    );
  }
  const shares = sourceShares(lattice, axes, nx);
  const covariance = bandedMatrix(count, band);
  neighbours.forEach((list, a) => {
    for (const b of list) covariance.entries[a * (band + 1) + b - a + band] = overlap(shares, a, b);
  });
  return covariance;
}

/** For each point those at or before it that are near enough to share noise. */
function neighbourTable(lattice: Lattice): number[][] {
  const { count, slow, fast } = lattice;
  const index = new Map<string, number>();
  for (let a = 0; a < count; a++) index.set(`${slow[a]},${fast[a]}`, a);
  return Array.from({ length: count }, (_, a) => {
    const near: number[] = [];
    for (let di = -farthestSteps; di <= 0; di++) {
      for (let dj = -farthestSteps; dj <= farthestSteps; dj++) {
        const b = index.get(`${slow[a] + di},${fast[a] + dj}`);
        if (b !== undefined && b <= a) near.push(b);
      }
    }
    return near;
  });
}

/** B[a][u] on a square of side x side sources per point, whose first source has whole-number place (i, j). */
interface SourceShares {
  readonly side: number;
  readonly firstI: Int32Array;
  readonly firstJ: Int32Array;
  readonly values: Float64Array;
}

function sourceShares(lattice: Lattice, axes: BeamAxes, nx: number): SourceShares {
  const { count, start, pixel, weight } = lattice;
  const { xi: x, eta: e } = axes;
  const reach = Math.ceil(sourceReach / sourceSpacing);
  const taps = 2 * reach + 1;
  const side = 2 * Math.ceil((windowRadius + sourceReach) / sourceSpacing) + 4;
  const firstI = new Int32Array(count);
  const firstJ = new Int32Array(count);
  const values = new Float64Array(count * side * side);
  const alongXi = new Float64Array(taps);
  const alongEta = new Float64Array(taps);
  // Unit variance: the sum over sources of h^2, sources being sourceSpacing^2 of area each, is 1.
  const amplitude = sourceSpacing * Math.sqrt((16 * Math.LN2) / Math.PI);
  for (let a = 0; a < count; a++) {
    firstI[a] = Math.round(lattice.xi[a] / sourceSpacing) - side / 2;
    firstJ[a] = Math.round(lattice.eta[a] / sourceSpacing) - side / 2;
    const base = a * side * side;
    for (let k = start[a]; k < start[a + 1]; k++) {
      const column = pixel[k] % nx;
      const row = (pixel[k] - column) / nx;
      const nearI = fillTaps(alongXi, (x[0] * column + x[1] * row) / sourceSpacing, reach);
      const nearJ = fillTaps(alongEta, (e[0] * column + e[1] * row) / sourceSpacing, reach);
      const share = weight[k] * amplitude;
      for (let i = 0; i < taps; i++) {
        const factor = share * alongXi[i];
        const at = base + (nearI - reach + i - firstI[a]) * side + nearJ - reach - firstJ[a];
        for (let j = 0; j < taps; j++) values[at + j] += factor * alongEta[j];
      }
    }
  }
  return { side, firstI, firstJ, values };
}

/** exp(-8 ln 2 d^2) of the sources around `place` (in source spacings); returns the nearest source. */
function fillTaps(taps: Float64Array, place: number, reach: number): number {
  const nearest = Math.round(place);
  const sharpness = 8 * Math.LN2 * sourceSpacing ** 2;
  for (let i = -reach; i <= reach; i++) taps[i + reach] = Math.exp(-sharpness * (nearest + i - place) ** 2);
  return nearest;
}

/** Sum over the sources that two windows share. */
function overlap(shares: SourceShares, a: number, b: number): number {
  const { side, firstI, firstJ, values } = shares;
  const di = firstI[a] - firstI[b];
  const dj = firstJ[a] - firstJ[b];
  const baseA = a * side * side;
  const baseB = b * side * side + di * side + dj;
  const lastI = Math.min(side, side - di);
  const firstColumn = Math.max(0, -dj);
  const lastColumn = Math.min(side, side - dj);
  let sum = 0;
  for (let i = Math.max(0, -di); i < lastI; i++) {
    const rowA = baseA + i * side;
    const rowB = baseB + i * side;
    for (let j = firstColumn; j < lastColumn; j++) sum += values[rowA + j] * values[rowB + j];
  }
  return sum;
}
