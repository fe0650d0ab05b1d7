import type { SkyImage, SkyImageOverrides } from '../files/sky-image.ts';
import type { Beam } from '../scene/types.ts';
import type { BrightnessUnit, Channel } from '../sky/types.ts';
import { InputError } from '../units/input-error.ts';
import { convertQuantity, parseQuantity } from '../units/quantity.ts';

/** What the user states of maps whose headers lack it. */
export interface StatedFacts extends Pick<SkyImageOverrides, 'frequencyHz' | 'widthHz' | 'beam' | 'convention'> {
  /** Such as "20 uJy/beam". */
  readonly noise?: string;
  /** Beam that all maps are brought to; the smallest round one that all allow where left out. */
  readonly smooth?: Beam;
}

export type MapStokes = 'I' | 'Q' | 'U';

/** What an argument says: the file, and what is written before and behind its name. */
export interface MapInput {
  readonly file: string;
  readonly stokes?: MapStokes;
  readonly overrides: SkyImageOverrides;
}

/** `Q=file` where a header does not say which Stokes parameter it holds, `file@1.4GHz` where it does not say its frequency. */
export function parseInput(input: string, facts: StatedFacts): MapInput {
  const [, given, file, at] = /^(?:([A-Za-z]{1,2})=)?(.*?)(?:@(.*))?$/.exec(input) ?? [];
  if (given !== undefined && !['I', 'Q', 'U'].includes(given)) {
    throw new InputError(`"${given}=" is not known: I=, Q= or U= may stand before a file`, { flag: input });
  }
  const frequencyHz = at === undefined ? facts.frequencyHz : placedQuantity(at, 'Hz', input);
  const { widthHz, beam, convention } = facts;
  const overrides = { ...(frequencyHz !== undefined && { frequencyHz }), ...(widthHz !== undefined && { widthHz }), ...(beam && { beam }), ...(convention && { convention }) };
  return { file, ...(given !== undefined && { stokes: given as MapStokes }), overrides };
}

/** What a header and the user say together of the planes of a file. */
export interface FileFacts {
  readonly stokes: SkyImage['stokes'];
  readonly channels: readonly Channel[];
  readonly brightness: BrightnessUnit;
  /** To `brightness`, for I and Q; U may change its sign too. */
  readonly scale: number;
  readonly signOfU: 1 | -1;
  readonly noise: Float64Array;
}

/** Joins both; what had to be assumed is added to `notes`. Throws InputError for what neither says. */
export function fileFacts(image: Omit<SkyImage, 'values'>, input: MapInput, facts: StatedFacts, notes: string[]): FileFacts {
  const { file } = input;
  const place = { file };
  notes.push(...image.notes.map((note) => `${file}: ${note}`));
  const stokes = input.stokes === undefined ? image.stokes : [input.stokes];
  if (stokes.length === 0) {
    throw new InputError('the header does not say which Stokes parameter this is; write Q= or U= or I= before the file name', place);
  }
  const { channels } = image;
  if (!channels) throw new InputError('the header does not say its frequency; give --frequency "1.4 GHz" or write @1.4GHz behind the file name', place);
  const brightness = (['Jy/beam', 'Jy/sr'] as const).find((unit) => canConvert(image.unit, unit));
  if (!brightness) throw new InputError(`BUNIT is "${image.unit}"; Jy/beam and Jy/sr with their prefixes are read`, place);
  const scale = convertQuantity(1, image.unit, brightness);
  if (image.convention === undefined) notes.push(`${file}: no convention of polarization angles is stated; taken as IAU (--convention)`);
  const noise = Float64Array.from(channels, (_, k) => (facts.noise !== undefined ? placedQuantity(facts.noise, brightness, `--noise ${facts.noise}`) : scale * (image.noise?.[k] ?? 0)));
  return { stokes, channels, brightness, scale, signOfU: image.convention === 'U-reversed' ? -1 : 1, noise };
}

function canConvert(from: string, to: BrightnessUnit): boolean {
  try {
    convertQuantity(1, from, to);
    return true;
  } catch {
    return false;
  }
}

function placedQuantity(text: string, unit: string, flag: string): number {
  try {
    return parseQuantity(text, unit);
  } catch (error) {
    throw error instanceof InputError ? error.at({ flag }) : error;
  }
}
