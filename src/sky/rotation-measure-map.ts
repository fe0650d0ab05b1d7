import { InputError } from '../units/input-error.ts';
import { depthSearch, fitRotationMeasure } from './rotation-measure.ts';
import type { SkyGrid, StokesCube } from './types.ts';
import { channelLambda2M2 } from './wavelength.ts';

/** Maps [row * nx + column] of the fit chi = chi0 + RM lambda^2; NaN where blank. */
export interface RotationMeasureMaps {
  readonly grid: SkyGrid;
  /** rad m^-2 */
  readonly rm: Float64Array;
  readonly rmError: Float64Array;
  /** Angle of the electric vector at zero wavelength, rad, in [0, pi). */
  readonly chi0: Float64Array;
  readonly chi0Error: Float64Array;
  /** Faraday-corrected orientation of the magnetic field, chi0 + 90 deg, rad, in [0, pi). */
  readonly fieldAngle: Float64Array;
  readonly chi2: Float64Array;
  /** Weighted rms of the angles about the line, rad. */
  readonly residual: Float64Array;
}

/** Where rotation measures are not believed, and how far they are sought. */
export interface RotationMeasureOptions {
  /** Blank where the mean of P/sigma over the channels is below this; 3 by default, where there is noise. */
  readonly minimumSignalToNoise?: number;
  /** Blank where the mean of P over the channel's largest P is below this; 1e-3 by default. */
  readonly minimumShare?: number;
  /** rad m^-2; see `depthSearch`. */
  readonly largestDepth?: number;
}

/**
 * RM, chi0 and their errors from all channels of all bands together, pixel by pixel. A channel's
 * wavelength squared is its mean over the channel. Throws InputError where the cubes lie on
 * different grids, where only some of them have noise, or where there is one wavelength only.
 */
export function rotationMeasureMaps(
  cubes: readonly StokesCube[],
  options: RotationMeasureOptions = {},
): RotationMeasureMaps {
  const channels = gatherChannels(cubes);
  const { grid } = cubes[0];
  const gather = (stokes: 'Q' | 'U', from: number, to: number): Float64Array => {
    const rows = new Float64Array(channels.length * (to - from) * grid.nx);
    channels.forEach((channel, k) => rows.set(channel[stokes].subarray(from * grid.nx, to * grid.nx), k * (to - from) * grid.nx));
    return rows;
  };
  return rotationMeasureRows(grid, channels, (from, to) => ({ Q: gather('Q', from, to), U: gather('U', from, to) }), options);
}

/** What a channel is to the fit, its planes apart. */
export interface FittedChannel {
  readonly lambda2M2: number;
  /** rms, 0 where there is none: of all channels or of none. */
  readonly sigma: number;
  readonly largestP: number;
}

/** Numbers of Q and of U that are held at a time. */
const heldNumbers = 4e6;

/** The same for cubes of which a few rows are held at a time: `rows` gives Q and U of rows, [channel * pixels + pixel]. */
export function rotationMeasureRows(
  grid: SkyGrid,
  channels: readonly FittedChannel[],
  rows: (from: number, to: number) => { readonly Q: Float64Array; readonly U: Float64Array },
  { minimumSignalToNoise = 3, minimumShare = 1e-3, largestDepth }: RotationMeasureOptions = {},
): RotationMeasureMaps {
  const noisy = channels.filter((channel) => channel.sigma > 0).length;
  if (noisy > 0 && noisy < channels.length) {
    throw new InputError(
      `${noisy} of ${channels.length} channels state noise and the others none; state it for all or for none`,
    );
  }
  const search = depthSearch(channels.map((channel) => channel.lambda2M2), largestDepth);
  const sigma = channels.map((channel) => channel.sigma);
  const { nx, ny } = grid;
  const blank = (): Float64Array => new Float64Array(nx * ny).fill(NaN);
  const maps: RotationMeasureMaps = { grid, rm: blank(), rmError: blank(), chi0: blank(), chi0Error: blank(), fieldAngle: blank(), chi2: blank(), residual: blank() };
  const [Q, U] = [new Float64Array(channels.length), new Float64Array(channels.length)];
  const step = Math.max(1, Math.floor(heldNumbers / (channels.length * nx)));
  for (let first = 0; first < ny; first += step) {
    const last = Math.min(ny, first + step);
    const pixels = (last - first) * nx;
    const held = rows(first, last);
    for (let pixel = 0; pixel < pixels; pixel++) {
      let [share, signal, seen] = [0, 0, 0];
      channels.forEach((channel, k) => {
        Q[k] = held.Q[k * pixels + pixel];
        U[k] = held.U[k * pixels + pixel];
        const P = Math.hypot(Q[k], U[k]);
        if (Number.isNaN(P)) return;
        seen++;
        share += channel.largestP > 0 ? P / channel.largestP : 0;
        signal += channel.sigma > 0 ? P / channel.sigma : Infinity;
      });
      if (seen === 0 || share < minimumShare * seen || signal < minimumSignalToNoise * seen) continue;
      const fit = fitRotationMeasure(search, Q, U, sigma);
      if (!fit) continue;
      const at = first * nx + pixel;
      for (const name of ['rm', 'rmError', 'chi0', 'chi0Error', 'chi2', 'residual'] as const) maps[name][at] = fit[name];
      maps.fieldAngle[at] = (fit.chi0 + Math.PI / 2) % Math.PI;
    }
  }
  return maps;
}

interface ChannelPlanes extends FittedChannel {
  readonly Q: Float64Array;
  readonly U: Float64Array;
}

function gatherChannels(cubes: readonly StokesCube[]): ChannelPlanes[] {
  if (cubes.length === 0) throw new InputError('a rotation measure needs maps; none were given');
  const { grid } = cubes[0];
  for (const cube of cubes) {
    if (!sameGrid(cube.grid, grid)) {
      throw new InputError(
        `the maps of band ${cube.band} lie on another grid (${cube.grid.nx} x ${cube.grid.ny} pixels) than ` +
          `those of band ${cubes[0].band} (${grid.nx} x ${grid.ny}); one pixel must mean one point of the sky`,
      );
    }
  }
  const channels = cubes.flatMap((cube) =>
    cube.channels.map((channel, k): ChannelPlanes => {
      const [start, end] = [k * grid.nx * grid.ny, (k + 1) * grid.nx * grid.ny];
      const [Q, U] = [cube.Q.subarray(start, end), cube.U.subarray(start, end)];
      let largestP = 0;
      for (let pixel = 0; pixel < Q.length; pixel++) {
        const P = Math.hypot(Q[pixel], U[pixel]);
        if (P > largestP) largestP = P;
      }
      return { lambda2M2: channelLambda2M2(channel), sigma: cube.noise[k], largestP, Q, U };
    }),
  );
  return channels;
}

function sameGrid(a: SkyGrid, b: SkyGrid): boolean {
  const keys = ['nx', 'ny', 'pixelArcsec', 'raDeg', 'decDeg', 'crpixX', 'crpixY'] as const;
  return keys.every((key) => a[key] === b[key]);
}
