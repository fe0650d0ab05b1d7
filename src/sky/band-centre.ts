import { debiasedIntensity, polarizationAngle, polarizedIntensity } from './derived.ts';
import type { Channel } from './types.ts';

/** Q, U and where known I of a band's channels, [channel * pixels + pixel], with their noise. */
export interface ChannelPlanes {
  readonly channels: readonly Channel[];
  readonly I?: Float64Array;
  readonly Q: Float64Array;
  readonly U: Float64Array;
  /** rms per channel, 0 where there is none. */
  readonly noise: ArrayLike<number>;
}

/** A band's maps at one frequency. */
export interface CentreMaps {
  readonly frequencyHz: number;
  readonly I?: Float64Array;
  readonly Q: Float64Array;
  readonly U: Float64Array;
  /** rms of each of I, Q and U. */
  readonly noise: number;
  /** Polarized intensity as measured, and without the bias of noise (Wardle & Kronberg 1974). */
  readonly P: Float64Array;
  readonly debiasedP: Float64Array;
  /** Angle of the electric vector, rad, north through east. */
  readonly chi: Float64Array;
}

/**
 * The maps at a band's centre: its middle channel, or the mean Q and U of its two middle channels
 * where their number is even. The channels must be in order of frequency.
 */
export function centreMaps(planes: ChannelPlanes): CentreMaps {
  return mapsOf(planes, middleChannels(planes.channels.length));
}

/** The middle channel of so many, or the two in the middle where their number is even. */
export function middleChannels(count: number): readonly number[] {
  return count % 2 === 1 ? [(count - 1) / 2] : [count / 2 - 1, count / 2];
}

/** The maps of one channel. */
export function channelMaps(planes: ChannelPlanes, channel: number): CentreMaps {
  return mapsOf(planes, [channel]);
}

function mapsOf({ channels, I, Q, U, noise }: ChannelPlanes, used: readonly number[]): CentreMaps {
  const pixels = Q.length / channels.length;
  const mean = (cube: Float64Array): Float64Array => {
    const map = new Float64Array(pixels);
    for (const channel of used) for (let k = 0; k < pixels; k++) map[k] += cube[channel * pixels + k] / used.length;
    return map;
  };
  const [meanQ, meanU] = [mean(Q), mean(U)];
  const rms = Math.sqrt(used.reduce((sum, channel) => sum + noise[channel] ** 2, 0)) / used.length;
  const P = polarizedIntensity(meanQ, meanU);
  return {
    frequencyHz: used.reduce((sum, channel) => sum + channels[channel].frequencyHz, 0) / used.length,
    ...(I && { I: mean(I) }),
    Q: meanQ,
    U: meanU,
    noise: rms,
    P,
    debiasedP: debiasedIntensity(P, rms),
    chi: polarizationAngle(meanQ, meanU),
  };
}
