import { scenePath } from '../scene/paths.ts';
import type { Scene } from '../scene/types.ts';
import { InputError } from '../units/input-error.ts';
import { formatQuantity, parseQuantity } from '../units/quantity.ts';
import type { ForwardModel, ModelSlopes } from './forward.ts';
import { makePrior } from './free-parameters.ts';
import type { FreeParameter } from './prior.ts';
import type { ForegroundText, FreeText } from './study-types.ts';
import type { DataBand, DataSet } from './types.ts';

const foregroundPath = 'observation.foreground.depth';
/** Scatter of the foreground's depth where a study says nothing of it. */
const foregroundSigma = '20 rad/m^2';
/** A calibration factor belongs to the band whose middle is no further off than this share. */
const nearestBand = 0.1;

/**
 * The foreground's Faraday depth as a free parameter, where a study does not hold it fixed and the
 * hypothesis says nothing of it: by default normal about the scene's own value. Undefined where it is not to be added.
 */
export function foregroundNuisance(given: ForegroundText | undefined, scene: Scene, named: readonly string[], place: FreeText['place']): FreeText | undefined {
  if (given === undefined || named.includes(foregroundPath)) return undefined;
  if (given !== 'default') return { path: foregroundPath, ...given };
  const { unit, shownUnit, get } = scenePath(scene, foregroundPath);
  const texts = [formatQuantity(get(), unit, shownUnit), foregroundSigma];
  return { path: foregroundPath, kind: 'normal', values: [{ text: texts[0], place }, { text: texts[1], place }], place };
}

/** One factor a band on the model, as free parameters. Throws InputError where a frequency belongs to no band, or twice to one. */
export function calibrationParameters(texts: readonly FreeText[], bands: readonly DataBand[]): FreeParameter[] {
  const parameters = texts.map((text): FreeParameter => {
    const refuse = (reason: string): never => {
      throw new InputError(reason, text.place);
    };
    const frequencyHz = placed(text, () => parseQuantity(text.path, 'Hz'));
    const [first, second] = text.values.map((part) => {
      const value = Number(part.text);
      return Number.isFinite(value) ? value : refuse(`calibration: "${part.text}" is given where a plain number is wanted`);
    });
    const off = bands.map(({ channels }) => {
      const frequencies = channels.map((channel) => channel.frequencyHz);
      return Math.abs((Math.min(...frequencies) + Math.max(...frequencies)) / 2 / frequencyHz - 1);
    });
    const band = off.indexOf(Math.min(...off));
    if (!(off[band] <= nearestBand)) refuse(`calibration: no band of the data is near ${text.path}; there are ${bands.map(({ name }) => name).join(', ')}`);
    return {
      path: `calibration.${bands[band].name}`, unit: '', shownUnit: '', calibrationBand: band,
      prior: makePrior(text, first, second), allowed: [0.1, 10], start: 1,
    };
  });
  parameters.forEach(({ calibrationBand, path }, k) => {
    if (parameters.findIndex((other) => other.calibrationBand === calibrationBand) < k) throw new InputError(`${path} is given twice`, texts[k].place);
  });
  return parameters;
}

/** A model whose maps are multiplied, band by band, by the calibration factors among the parameters. */
export function withCalibration(forward: ForwardModel, { planes }: Pick<DataSet, 'planes'>, parameters: readonly FreeParameter[]): ForwardModel {
  if (parameters.every(({ calibrationBand }) => calibrationBand === undefined)) return forward;
  const factorOf = planes.map(({ band }) => parameters.findIndex(({ calibrationBand }) => calibrationBand !== undefined && calibrationBand === band));
  const scale = (maps: readonly Float64Array[], values: Float64Array): readonly Float64Array[] =>
    maps.map((map, k) => (factorOf[k] ?? -1) < 0 ? map : map.map((value) => value * values[factorOf[k]]));
  const model = async (values: Float64Array, signal?: AbortSignal): Promise<readonly Float64Array[]> => scale(await forward(values, signal), values);
  const { slopes: bare } = forward;
  if (!bare) return model;
  const slopes = async (values: Float64Array, signal?: AbortSignal): Promise<ModelSlopes | undefined> => {
    const known = await bare(values, signal);
    if (!known) return undefined;
    const columns = known.columns.map((column, j) => {
      if (parameters[j].calibrationBand === undefined) return column && scale(column, values);
      // Maps are proportional to their own factor.
      return known.maps.map((map, k) => (factorOf[k] === j ? map : new Float64Array(map.length)));
    });
    return { maps: scale(known.maps, values), columns };
  };
  return Object.assign(model, { slopes });
}

function placed<T>({ place }: FreeText, work: () => T): T {
  try {
    return work();
  } catch (error) {
    throw error instanceof InputError ? error.at(place) : error;
  }
}
