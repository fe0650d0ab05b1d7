import { centreMaps, type CentreMaps } from '../sky/band-centre.ts';
import type { RotationMeasureMaps } from '../sky/rotation-measure-map.ts';
import { rotationMeasureMaps } from '../sky/rotation-measure-map.ts';
import type { SkyGrid, StokesCube } from '../sky/types.ts';
import type { DataSet, StokesQuantity } from './types.ts';

/** Bands of a data set, or of a model on its grid, that have both Q and U in every channel. */
export interface BandView {
  readonly name: string;
  readonly cube: StokesCube;
  readonly centre: CentreMaps;
}

/**
 * Puts planes together by band: those of the data (no `model`), or a model's maps in their place,
 * without noise. Bands without Q or U have no polarization to show and are left out.
 */
export function bandViews(data: DataSet, grid: SkyGrid, model?: readonly Float64Array[]): readonly BandView[] {
  return data.bands.flatMap((band, index) => {
    const find = (quantity: StokesQuantity, channel: number): number =>
      data.planes.findIndex((plane) => plane.band === index && plane.channel === channel && plane.quantity === quantity);
    const order = band.channels.map((_, channel) => channel).filter((channel) => find('Q', channel) >= 0 && find('U', channel) >= 0);
    order.sort((a, b) => band.channels[a].frequencyHz - band.channels[b].frequencyHz);
    if (order.length === 0) return [];
    const pixels = data.axes.nx * data.axes.ny;
    const gather = (quantity: StokesQuantity): Float64Array => {
      const cube = new Float64Array(order.length * pixels).fill(NaN);
      order.forEach((channel, k) => {
        const plane = find(quantity, channel);
        if (plane >= 0) cube.set(model ? model[plane] : data.planes[plane].values, k * pixels);
      });
      return cube;
    };
    const noise = Float64Array.from(order, (channel) => (model ? 0 : typicalNoise(data.planes[find('Q', channel)].noise)));
    const cube: StokesCube = {
      band: band.name,
      grid,
      channels: order.map((channel) => band.channels[channel]),
      I: gather('I'),
      Q: gather('Q'),
      U: gather('U'),
      unit: data.unit,
      ...(band.beam && { beam: band.beam }),
      noise,
    };
    return [{ name: band.name, cube, centre: centreMaps(cube) }];
  });
}

/** RM over all bands, or undefined where there is one wavelength only. */
export function rotationMeasuresOf(views: readonly BandView[]): RotationMeasureMaps | undefined {
  const frequencies = new Set(views.flatMap(({ cube }) => cube.channels.map((channel) => channel.frequencyHz)));
  return frequencies.size > 1 ? rotationMeasureMaps(views.map(({ cube }) => cube)) : undefined;
}

/** The rms of noise, or the median of a map of it. */
function typicalNoise(noise: number | Float64Array): number {
  if (typeof noise === 'number') return noise;
  const sorted = noise.filter((value) => Number.isFinite(value)).sort();
  return sorted[Math.floor(sorted.length / 2)] ?? 0;
}
