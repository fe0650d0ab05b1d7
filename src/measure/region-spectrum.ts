import type { CubeSource } from '../sky/cube-source.ts';
import type { Channel } from '../sky/types.ts';
import { channelLambda2M2 } from '../sky/wavelength.ts';

/** Cubes of a band with the rms of Q, U and I per channel. */
export interface SpectralBand {
  readonly channels: readonly Channel[];
  readonly I?: CubeSource;
  readonly Q: CubeSource;
  readonly U: CubeSource;
  readonly noise: ArrayLike<number>;
}

/** The thermal share of I at a pixel and frequency. */
export type ThermalShare = (pixel: number, frequencyHz: number) => number;

/** Sums over the pixels of regions, [region * channels + channel], the channels of all bands after one another. */
export interface RegionSums {
  readonly channels: readonly Channel[];
  readonly noise: readonly number[];
  /** Whether every band has I. */
  readonly hasI: boolean;
  readonly I: Float64Array;
  readonly Q: Float64Array;
  readonly U: Float64Array;
  readonly counts: Float64Array;
}

/** The Q and U of a region or pixel over wavelength, as fractions of the non-thermal I where I is there. */
export interface RegionSpectrum {
  readonly lambda2M2: Float64Array;
  readonly frequenciesHz: Float64Array;
  readonly q: Float64Array;
  readonly u: Float64Array;
  /** rms of each; 0 where no noise is stated. */
  readonly sigma: Float64Array;
  readonly isFraction: boolean;
}

export interface SpectrumOptions {
  /** Pixels that share their noise; see `pixelsPerBeam`. */
  readonly pixelsPerBeam: number;
  /** Where there is no I, P is multiplied by (nu/mean nu)^alpha; default 0. */
  readonly spectralIndex?: number;
  /** Q and U themselves, where there is I too. */
  readonly isPlain?: boolean;
}

/** Where maps are summed: their size, the region of every pixel (-1: none) and the number of regions. */
export interface SummedRegions {
  readonly nx: number;
  readonly ny: number;
  readonly regionOf: ArrayLike<number>;
  readonly count: number;
}

export interface SumWatch {
  /** Rows done and rows in all. */
  readonly onProgress?: (done: number, total: number) => void;
  readonly pause?: () => Promise<void>;
  readonly signal?: AbortSignal;
}

const usualMemory = 64e6;

/** Sums Q, U and the non-thermal I of regions, some rows at a time. A channel of a pixel counts where none of them is blank. */
export async function sumRegions(bands: readonly SpectralBand[], regions: SummedRegions, thermal?: ThermalShare, watch: SumWatch = {}): Promise<RegionSums> {
  const sums = noSums(bands, regions.count);
  const block = Math.max(1, Math.floor(usualMemory / (3 * 8 * regions.nx * sums.channels.length)));
  for (let from = 0; from < regions.ny; from += block) {
    watch.signal?.throwIfAborted();
    const to = Math.min(regions.ny, from + block);
    addRows(sums, bands, regions, from, to, thermal);
    watch.onProgress?.(to, regions.ny);
    await watch.pause?.();
  }
  return sums;
}

/**
 * The means over some of the regions together, channel by channel: fractions of I without its thermal
 * share, or Q and U where there is no I. The error of a fraction is that of Q and of I to first order, q
 * shares the error of I with u: counted in full. NaN where no pixel counts.
 */
export function regionSpectrum(sums: RegionSums, regions: readonly number[], options: SpectrumOptions): RegionSpectrum {
  const { channels, noise } = sums;
  const isFraction = sums.hasI && !options.isPlain;
  const middle = Math.exp(channels.reduce((sum, { frequencyHz }) => sum + Math.log(frequencyHz), 0) / channels.length);
  const [q, u, sigma] = [NaN, NaN, 0].map((blank) => new Float64Array(channels.length).fill(blank));
  channels.forEach(({ frequencyHz }, channel) => {
    const total = (values: Float64Array): number => regions.reduce((sum, region) => sum + values[region * channels.length + channel], 0);
    const [I, Q, U, count] = [sums.I, sums.Q, sums.U, sums.counts].map(total);
    if (count === 0 || (isFraction && !(I > 0))) return;
    const rms = noise[channel] / Math.sqrt(Math.max(1, count / options.pixelsPerBeam));
    const scale = isFraction ? count / I : (frequencyHz / middle) ** (options.spectralIndex ?? 0);
    q[channel] = (Q / count) * scale;
    u[channel] = (U / count) * scale;
    sigma[channel] = rms * scale * (isFraction ? Math.sqrt(1 + q[channel] ** 2 + u[channel] ** 2) : 1);
  });
  return {
    lambda2M2: Float64Array.from(channels, channelLambda2M2),
    frequenciesHz: Float64Array.from(channels, ({ frequencyHz }) => frequencyHz),
    q,
    u,
    sigma,
    isFraction,
  };
}

/** Spectra of single pixels by their place; neighbours in a row cost one reading of it. */
export function pixelSpectra(bands: readonly SpectralBand[], { nx, ny }: Pick<SummedRegions, 'nx' | 'ny'>, options: Omit<SpectrumOptions, 'pixelsPerBeam'>, thermal?: ThermalShare): (pixel: number) => RegionSpectrum {
  const regions = { nx, ny, regionOf: Int32Array.from({ length: nx * ny }, (_, pixel) => pixel % nx), count: nx };
  let known: { readonly row: number; readonly sums: RegionSums } | undefined;
  return (pixel) => {
    const row = Math.floor(pixel / nx);
    if (known?.row !== row) {
      const sums = noSums(bands, nx);
      addRows(sums, bands, regions, row, row + 1, thermal);
      known = { row, sums };
    }
    return regionSpectrum(known.sums, [pixel % nx], { ...options, pixelsPerBeam: 1 });
  };
}

/**
 * The thermal share of I at a frequency from its share at another: thermal emission falls as nu^-0.1,
 * the rest as nu^-alpha (optically thin; common practice).
 */
export function thermalShare(share: number, atHz: number, frequencyHz: number, alpha: number): number {
  const ratio = frequencyHz / atHz;
  const thermal = share * ratio ** -0.1;
  return thermal / (thermal + (1 - share) * ratio ** -alpha);
}

function noSums(bands: readonly SpectralBand[], count: number): RegionSums {
  const channels = bands.flatMap((band) => band.channels);
  const zeros = (): Float64Array => new Float64Array(count * channels.length);
  return {
    channels,
    noise: bands.flatMap((band) => band.channels.map((_, k) => band.noise[k])),
    hasI: bands.every((band) => band.I !== undefined),
    I: zeros(),
    Q: zeros(),
    U: zeros(),
    counts: zeros(),
  };
}

function addRows(sums: RegionSums, bands: readonly SpectralBand[], { nx, regionOf }: SummedRegions, from: number, to: number, thermal?: ThermalShare): void {
  const pixels = (to - from) * nx;
  const all = sums.channels.length;
  let first = 0;
  for (const band of bands) {
    const [Q, U, I] = [band.Q.rows(from, to), band.U.rows(from, to), sums.hasI ? band.I?.rows(from, to) : undefined];
    band.channels.forEach(({ frequencyHz }, k) => {
      for (let pixel = 0; pixel < pixels; pixel++) {
        const region = regionOf[from * nx + pixel];
        if (region < 0) continue;
        const at = k * pixels + pixel;
        const light = I ? I[at] * (1 - (thermal?.(from * nx + pixel, frequencyHz) ?? 0)) : 0;
        if (!Number.isFinite(Q[at] + U[at] + light)) continue;
        const place = region * all + first + k;
        sums.Q[place] += Q[at];
        sums.U[place] += U[at];
        sums.I[place] += light;
        sums.counts[place]++;
      }
    });
    first += band.channels.length;
  }
}
