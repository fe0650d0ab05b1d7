import { findLargestDepth } from '../ray/depth.ts';
import type { SpectralPoint } from '../ray/integrand.ts';
import type { RayBundle } from '../ray/types.ts';
import type { Band, Scene } from '../scene/types.ts';
import { channelNodes } from './bandwidth.ts';
import type { Channel } from './types.ts';

/** Which of the frequencies followed make up a channel, and with what weights. */
export interface ChannelPlan {
  readonly channel: Channel;
  /** Indices into the spectrum. */
  readonly points: readonly number[];
  readonly weights: Float64Array;
}

export interface BandPlan {
  readonly band: Band;
  readonly channels: readonly ChannelPlan[];
  /** Points at which heights of origin are taken: the band's centre, or each of its frequencies. */
  readonly origins: readonly { readonly frequencyHz: number; readonly point: number }[];
}

/** The frequencies at which rays are followed so that every channel is a mean to tolerance. */
export interface SpectralPlan {
  readonly spectrum: readonly SpectralPoint[];
  readonly bands: readonly BandPlan[];
}

export interface PlanOptions {
  /** How much larger than the scene's own the depths may be that channels must be averaged for. */
  readonly depthReserve?: number;
  /** Largest |depth| of the foreground, rad m^-2; the scene's constant one where left out. */
  readonly foreground?: number;
  /** Which share of rays the averages must be exact for; 1 by default. */
  readonly depthQuantile?: number;
  /** Whether heights of origin are wanted. */
  readonly origins?: boolean;
}

/** Plans the frequencies of a scene's bands; wide channels get as many as their depths ask for. */
export function planSpectrum(scene: Scene, bundle: RayBundle, bands: readonly Band[], options: PlanOptions = {}): SpectralPlan {
  return planBands(scene, bands, plannedDepth(scene, bundle, bands, options), options.origins);
}

/** The largest |depth| (rad m^-2) that channels must be averaged for; 0 where none is wide. */
export function plannedDepth(
  scene: Scene,
  bundle: RayBundle,
  bands: readonly Band[],
  { depthReserve = 1, depthQuantile = 1, foreground = Math.abs(scene.observation.foregroundDepth) }: PlanOptions = {},
): number {
  const wide = bands.some((band) => band.channels.some((channel) => channel.widthHz > 0));
  return wide ? depthReserve * (findLargestDepth(scene, bundle, depthQuantile) + foreground) : 0;
}

/** The same plan for a largest depth that is known. */
export function planBands(scene: Scene, bands: readonly Band[], largestDepth: number, withOrigins = true): SpectralPlan {
  const spectrum: SpectralPoint[] = [];
  const known = new Map<string, number>();
  const point = (frequencyHz: number, centreHz: number): number => {
    const key = `${frequencyHz}/${centreHz}`;
    let index = known.get(key);
    if (index === undefined) {
      index = spectrum.push({ frequencyHz, centreHz }) - 1;
      known.set(key, index);
    }
    return index;
  };
  const plans = bands.map((band): BandPlan => {
    const channels = band.channels.map((channel): ChannelPlan => {
      const nodes = channelNodes(channel, largestDepth, scene.numerics.tolerance, scene.freeFree !== undefined);
      const points = Array.from(nodes.frequenciesHz, (frequency) => point(frequency, channel.frequencyHz));
      return { channel, points, weights: nodes.weights };
    });
    const origins = withOrigins ? originFrequencies(band).map((frequencyHz) => ({ frequencyHz, point: point(frequencyHz, frequencyHz) })) : [];
    return { band, channels, origins };
  });
  return { spectrum, bands: plans };
}

/** Frequencies at which a band's heights of origin are taken: its centre, or each of its channels'. */
export function originFrequencies(band: Band): readonly number[] {
  return band.centreHz !== undefined ? [band.centreHz] : band.channels.map((channel) => channel.frequencyHz);
}
