import { channelLambda2M2 } from '../sky/wavelength.ts';
import type { Channel } from '../sky/types.ts';

/** Cubes of bands, [channel * pixels + pixel], with the rms of Q, U and I per channel. */
export interface SpectralBand {
  readonly channels: readonly Channel[];
  readonly I?: Float64Array;
  readonly Q: Float64Array;
  readonly U: Float64Array;
  readonly noise: ArrayLike<number>;
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
  /** Thermal share of I of a channel at a pixel; none where left out. */
  readonly thermal?: (pixel: number, frequencyHz: number) => number;
  /** Where there is no I, P is multiplied by (nu/mean nu)^alpha; default 0. */
  readonly spectralIndex?: number;
}

/**
 * Means of Q, U and I over `pixels`, channel by channel; fractions are Q and U over I without its
 * thermal share. Channels with a blank pixel count those that are not. The error of a fraction is
 * that of Q and of I to first order, q shares the error of I with u: counted in full.
 */
export function regionSpectrum(bands: readonly SpectralBand[], pixels: readonly number[], total: number, options: SpectrumOptions): RegionSpectrum {
  const channels = bands.flatMap((band) => band.channels.map((channel, k) => ({ band, channel, k })));
  const isFraction = bands.every((band) => band.I !== undefined);
  const middle = Math.exp(channels.reduce((sum, { channel }) => sum + Math.log(channel.frequencyHz), 0) / channels.length);
  const [q, u, sigma] = [0, 1, 2].map(() => new Float64Array(channels.length).fill(NaN));
  channels.forEach(({ band, channel, k }, index) => {
    let [sumQ, sumU, sumI, count] = [0, 0, 0, 0];
    for (const pixel of pixels) {
      const at = k * total + pixel;
      const I = band.I ? band.I[at] * (1 - (options.thermal?.(pixel, channel.frequencyHz) ?? 0)) : 0;
      if (!Number.isFinite(band.Q[at] + band.U[at] + (isFraction ? I : 0))) continue;
      sumQ += band.Q[at];
      sumU += band.U[at];
      sumI += I;
      count++;
    }
    if (count === 0 || (isFraction && !(sumI > 0))) return;
    const mean = (sum: number): number => sum / count;
    const rms = band.noise[k] / Math.sqrt(Math.max(1, count / options.pixelsPerBeam));
    const scale = isFraction ? 1 / mean(sumI) : (channel.frequencyHz / middle) ** (options.spectralIndex ?? 0);
    q[index] = mean(sumQ) * scale;
    u[index] = mean(sumU) * scale;
    sigma[index] = rms * scale * (isFraction ? Math.sqrt(1 + q[index] ** 2 + u[index] ** 2) : 1);
  });
  return {
    lambda2M2: Float64Array.from(channels, ({ channel }) => channelLambda2M2(channel)),
    frequenciesHz: Float64Array.from(channels, ({ channel }) => channel.frequencyHz),
    q,
    u,
    sigma: sigma.map((value) => (Number.isNaN(value) ? 0 : value)),
    isFraction,
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
