import { InputError } from '../units/input-error.ts';
import { parseQuantity } from '../units/quantity.ts';
import type { CandidateBand } from './study-types.ts';
import type { DataPlane, DataSet } from './types.ts';

/**
 * The data of a study with zero in place of every value, masks kept, and Q and U of a band that could
 * be observed beside them, on the same grid. Throws InputError, placed in the study, for a noise or beam that does not fit.
 */
export function plannedData(data: DataSet, candidate?: CandidateBand): DataSet {
  const emptied = data.planes.map((plane): DataPlane => ({ ...plane, values: plane.values.map((value) => (Number.isFinite(value) ? 0 : NaN)) }));
  const maps: DataSet = { axes: data.axes, unit: data.unit, bands: data.bands, planes: emptied, assumptions: data.assumptions };
  if (!candidate) return maps;
  const { noise, time, beam, channels, name } = candidate;
  const rms = placedRms(candidate, data) / Math.sqrt(time);
  if (!(rms > 0)) throw new InputError(`a noise of ${noise.text} is given; allowed: above 0`, noise.place);
  if (data.unit === 'Jy/beam' && !beam) throw new InputError(`the band ${name} needs its \`beam\`, since the maps are in Jy/beam`, noise.place);
  const band = data.bands.length;
  const pixels = data.axes.nx * data.axes.ny;
  const added = (['Q', 'U'] as const).flatMap((quantity) =>
    channels.map((_, channel): DataPlane => ({ quantity, band, channel, values: new Float64Array(pixels), noise: rms, ...(beam && { correlation: beam }) })),
  );
  return { ...maps, bands: [...data.bands, { name, channels, ...(beam && { beam }) }], planes: [...emptied, ...added] };
}

function placedRms({ noise }: CandidateBand, { unit }: DataSet): number {
  try {
    return parseQuantity(noise.text, unit);
  } catch (error) {
    throw error instanceof InputError ? error.at(noise.place) : error;
  }
}
