import { makeDeconvolver, type DeconvolveOptions } from './deconvolve.ts';
import { faradayMoments, findDepthPeak, defaultThreshold, type DepthPeak } from './depth-peak.ts';
import type { DepthPlan } from './depth-spectrum.ts';
import { makeDepthTransform } from './depth-transform.ts';

/** Q and U of the rows `from` to `to` (not included) of a cube, [channel * pixels + pixel]. */
export interface RowSource {
  readonly nx: number;
  readonly ny: number;
  rows(from: number, to: number): { readonly Q: ArrayLike<number>; readonly U: ArrayLike<number> };
}

export interface DepthMapOptions {
  /** Peaks below this many times the noise are blank; default 5. */
  readonly threshold?: number;
  /** Deconvolve before peaks and moments are taken. */
  readonly deconvolve?: DeconvolveOptions;
  /** Takes |F| of rows as they are done, [depth * pixels + pixel]: a cube need never be whole in memory. */
  readonly onRows?: (from: number, to: number, amplitude: Float64Array) => void;
  /** Rows done and rows in all. */
  readonly onProgress?: (done: number, total: number) => void;
  /** Awaited between blocks, so that whoever watches can draw, and stop the work. */
  readonly pause?: () => Promise<void>;
  readonly signal?: AbortSignal;
  /** Of working arrays, bytes; default 64 MB. */
  readonly memoryBytes?: number;
}

/** What the Faraday spectra of all pixels show, [row * nx + column]; NaN where no peak is believed. */
export interface DepthMaps {
  /** Depth of the highest peak and its error, rad m^-2. */
  readonly depth: Float64Array;
  readonly depthError: Float64Array;
  /** Height of the peak without its bias, and its error. */
  readonly P: Float64Array;
  readonly PError: Float64Array;
  /** Angle of the electric vector at zero wavelength, rad, in [0, pi), and its error. */
  readonly chi0: Float64Array;
  readonly chi0Error: Float64Array;
  /** Faraday-corrected orientation of the magnetic field, chi0 + 90 deg, rad, in [0, pi). */
  readonly fieldAngle: Float64Array;
  /** Moments of |F| above the threshold: sum (unit of F times rad m^-2), mean and width (rad m^-2). */
  readonly momentTotal: Float64Array;
  readonly momentMean: Float64Array;
  readonly momentWidth: Float64Array;
}

const peakNames = ['depth', 'depthError', 'P', 'PError', 'chi0', 'chi0Error'] as const satisfies readonly (keyof DepthPeak)[];
const usualMemory = 64e6;
/** Moments without stated noise count what stands above this share of the highest |F|. */
const leastShare = 0.1;

/** Faraday spectra of a cube, a few rows at a time: memory does not grow with the number of rows. */
export async function depthMaps(source: RowSource, plan: DepthPlan, options: DepthMapOptions = {}): Promise<DepthMaps> {
  const { nx, ny } = source;
  const { threshold = defaultThreshold, memoryBytes = usualMemory } = options;
  const transform = makeDepthTransform(plan);
  const deconvolve = options.deconvolve && makeDeconvolver(plan, options.deconvolve);
  const perRow = 8 * nx * (2 * plan.lambda2M2.length + 3 * plan.count);
  const block = Math.min(ny, Math.max(1, Math.floor(memoryBytes / perRow)));
  const plane = (): Float64Array => new Float64Array(nx * ny).fill(NaN);
  const maps: DepthMaps = {
    depth: plane(), depthError: plane(), P: plane(), PError: plane(), chi0: plane(), chi0Error: plane(), fieldAngle: plane(),
    momentTotal: plane(), momentMean: plane(), momentWidth: plane(),
  };
  const [oneRe, oneIm] = [new Float64Array(plan.count), new Float64Array(plan.count)];
  for (let from = 0; from < ny; from += block) {
    options.signal?.throwIfAborted();
    const to = Math.min(ny, from + block);
    const pixels = (to - from) * nx;
    const { Q, U } = source.rows(from, to);
    const { re, im } = transform(Q, U, pixels);
    for (let pixel = 0; pixel < pixels; pixel++) {
      if (deconvolve && Number.isFinite(re[pixel])) {
        for (let index = 0, at = pixel; index < plan.count; index++, at += pixels) [oneRe[index], oneIm[index]] = [re[at], im[at]];
        const sharp = deconvolve(oneRe, oneIm);
        for (let index = 0, at = pixel; index < plan.count; index++, at += pixels) [re[at], im[at]] = [sharp.re[index], sharp.im[index]];
      }
      const at = from * nx + pixel;
      const place = { threshold, start: pixel, stride: pixels };
      const peak = findDepthPeak(plan, re, im, place);
      for (const name of peakNames) maps[name][at] = peak[name];
      maps.fieldAngle[at] = (peak.chi0 + Math.PI / 2) % Math.PI;
      const moments = faradayMoments(plan, re, im, plan.noise > 0 ? threshold * plan.noise : leastShare * peak.P, place);
      maps.momentTotal[at] = moments.total;
      maps.momentMean[at] = moments.mean;
      maps.momentWidth[at] = moments.width;
    }
    if (options.onRows) options.onRows(from, to, re.map((value, k) => Math.hypot(value, im[k])));
    options.onProgress?.(to, ny);
    await options.pause?.();
  }
  return maps;
}
