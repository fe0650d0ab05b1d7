import { readFits } from '../files/fits-read.ts';
import { openCubeRows } from '../files/fits-rows.ts';
import { readBytes } from '../files/node-io.ts';
import { skyImageFromFits } from '../files/sky-fits-read.ts';
import type { SkyImage, SkyImageOverrides } from '../files/sky-image.ts';
import { sameGrid } from '../infer/map-facts.ts';
import type { MapFrame } from '../measure/disc.ts';
import type { Beam } from '../scene/types.ts';
import { commonBeam, convolveTo } from '../sky/common-beam.ts';
import type { RowSource } from '../sky/depth-maps.ts';
import type { BrightnessUnit, Channel } from '../sky/types.ts';
import { InputError } from '../units/input-error.ts';
import { convertQuantity, parseQuantity } from '../units/quantity.ts';

/** One band of maps on a common grid with a common beam, IAU signs; cubes [channel * ny * nx + row * nx + column]. */
export interface MapBand {
  readonly name: string;
  readonly channels: readonly Channel[];
  readonly I?: Float64Array;
  readonly Q: Float64Array;
  readonly U: Float64Array;
  /** rms of Q and of U per channel; 0 where none is stated. */
  readonly noise: Float64Array;
}

/** The maps to measure, bands from long to short wavelength. */
export interface MapData {
  readonly frame: MapFrame;
  readonly unit: BrightnessUnit;
  readonly bands: readonly MapBand[];
  /** What was assumed, a sentence each. */
  readonly notes: readonly string[];
}

/** What the user states of maps whose headers lack it. */
export interface StatedFacts extends Pick<SkyImageOverrides, 'frequencyHz' | 'widthHz' | 'beam' | 'convention'> {
  /** Such as "20 uJy/beam". */
  readonly noise?: string;
  /** Beam that all maps are brought to; the smallest round one that all allow where left out. */
  readonly smooth?: Beam;
}

type Stokes = 'I' | 'Q' | 'U';

interface Plane {
  readonly stokes: Stokes;
  readonly file: string;
  readonly image: SkyImage;
  readonly channels: readonly Channel[];
  readonly values: Float64Array;
  readonly noise: Float64Array;
  readonly beam?: Beam;
}

/**
 * Reads maps: each argument is a FITS file, `Q=file` where its header does not say which Stokes parameter
 * it holds, `file@1.4GHz` where it does not say its frequency. Throws InputError for what is missing or
 * does not fit together.
 */
export function readMaps(inputs: readonly string[], facts: StatedFacts): MapData {
  const notes: string[] = [];
  const units = new Set<BrightnessUnit>();
  const planes = inputs.flatMap((input) => readInput(input, facts, units, notes));
  if (units.size > 1) throw new InputError(`some maps are in Jy/beam and others in Jy/sr; bring all to one unit`);
  const { image, file } = planes[0];
  for (const other of planes) {
    if (!sameGrid({ ...other.image, file: other.file }, image)) {
      throw new InputError(`${other.file} is on another grid than ${file}; bring all maps to one grid`);
    }
  }
  const [unit] = units;
  const beams = planes.flatMap((plane) => (plane.beam ? [plane.beam] : []));
  if (beams.length > 0 && beams.length < planes.length) {
    const bare = planes.find((plane) => !plane.beam);
    throw new InputError(`${bare?.file} states no beam and other maps do; state it with --beam`);
  }
  const target = beams.length > 0 ? (facts.smooth ?? commonBeam(beams)) : undefined;
  const smoothed = planes.map((plane) => toBeam(plane, target, unit, notes));
  const bands = gatherBands(smoothed);
  const { wcs, nx, ny } = image;
  return { frame: { nx, ny, wcs, ...(target && { beam: target }) }, unit, bands, notes: [...new Set(notes)] };
}

/** What an argument says: the file, and what is written before and behind its name. */
interface Input {
  readonly file: string;
  readonly stokes?: Stokes;
  readonly overrides: SkyImageOverrides;
}

function parseInput(input: string, facts: StatedFacts): Input {
  const [, given, file, at] = /^(?:([A-Za-z]{1,2})=)?(.*?)(?:@(.*))?$/.exec(input) ?? [];
  if (given !== undefined && !['I', 'Q', 'U'].includes(given)) {
    throw new InputError(`"${given}=" is not known: I=, Q= or U= may stand before a file`, { flag: input });
  }
  const frequencyHz = at === undefined ? facts.frequencyHz : placedQuantity(at, 'Hz', input);
  const overrides = { ...(frequencyHz !== undefined && { frequencyHz }), ...(facts.widthHz !== undefined && { widthHz: facts.widthHz }), ...(facts.beam && { beam: facts.beam }), ...(facts.convention && { convention: facts.convention }) };
  return { file, ...(given !== undefined && { stokes: given as Stokes }), overrides };
}

/** What a header and the user say together of the planes of a file. */
interface PlaneFacts {
  readonly stokes: SkyImage['stokes'];
  readonly channels: readonly Channel[];
  readonly brightness: BrightnessUnit;
  /** To `brightness`, for I and Q; U may change its sign too. */
  readonly scale: number;
  readonly signOfU: 1 | -1;
  readonly noise: Float64Array;
}

function planeFacts(image: Omit<SkyImage, 'values'>, input: Input, facts: StatedFacts, notes: string[]): PlaneFacts {
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

function readInput(text: string, facts: StatedFacts, units: Set<BrightnessUnit>, notes: string[]): Plane[] {
  const input = parseInput(text, facts);
  const { file } = input;
  const image = skyImageFromFits(readFits(readBytes(file), file), file, input.overrides);
  const { stokes, channels, brightness, scale, signOfU, noise } = planeFacts(image, input, facts, notes);
  units.add(brightness);
  const size = channels.length * image.nx * image.ny;
  if (image.values.length !== size * stokes.length) {
    throw new InputError(`${image.values.length / image.nx / image.ny} planes for ${channels.length} channels of Stokes ${stokes.join(', ')}`, { file });
  }
  return stokes.flatMap((name, k): Plane[] => {
    if (name === 'V') return [];
    const factor = name === 'U' ? signOfU * scale : scale;
    const values = image.values.subarray(k * size, (k + 1) * size).map((value) => factor * value);
    return [{ stokes: name, file, image, channels, values, noise, ...(image.beam && { beam: image.beam }) }];
  });
}

/** Q and U cubes too large for memory, read by rows. */
export interface LargeMaps {
  /** Without bands: no plane is in memory yet. */
  readonly data: MapData;
  readonly channels: readonly Channel[];
  readonly noise: Float64Array;
  readonly source: RowSource;
  close(): void;
}

/** Bytes that a number of a map takes while maps are read and measured in memory: as read, sorted, scaled, joined. */
const bytesInMemory = 32;

/**
 * Opens cubes of Q and U for reading by rows where holding them would take more than `memoryBytes`;
 * undefined where it would not, or where other maps are among them. Throws InputError where they do not
 * fit together, or are packed so that rows cannot be read.
 */
export function openLargeMaps(inputs: readonly string[], facts: StatedFacts, memoryBytes: number): LargeMaps | undefined {
  const parsed = inputs.map((text) => parseInput(text, facts));
  const opened = parsed.map((input) => ({ input, cube: openCubeRows(input.file, input.file, input.overrides) }));
  const close = (): void => opened.forEach(({ cube }) => cube?.close());
  try {
    const numbers = opened.reduce((sum, { cube }) => sum + (cube?.count ?? 0), 0);
    if (numbers * bytesInMemory <= memoryBytes) {
      close();
      return undefined;
    }
    const notes: string[] = [];
    const planes = opened.map(({ input, cube }) => {
      if (!cube) throw new InputError('the maps are too large for memory, and this file cannot be read by rows: unpack it, with its axes in the order RA, Dec, frequency', { file: input.file });
      return { input, cube, ...planeFacts(cube.facts, input, facts, notes) };
    });
    const find = (stokes: Stokes): (typeof planes)[number] => {
      const found = planes.filter((plane) => plane.stokes.length === 1 && plane.stokes[0] === stokes);
      if (found.length === 1) return found[0];
      throw new InputError(`maps too large for memory are measured as one cube of Q and one of U; ${found.length} of ${stokes} are given (--memory allows more)`);
    };
    const [Q, U] = [find('Q'), find('U')];
    const first = Q.cube.facts;
    if (!sameGrid({ ...U.cube.facts, values: new Float64Array(0), file: U.input.file }, first)) throw new InputError(`${U.input.file} is on another grid than ${Q.input.file}; bring all maps to one grid`);
    const isSame = Q.channels.length === U.channels.length && Q.channels.every(({ frequencyHz }, k) => Math.abs(frequencyHz / U.channels[k].frequencyHz - 1) < 1e-9);
    if (!isSame || Q.brightness !== U.brightness) throw new InputError(`${U.input.file} has other channels or another unit than ${Q.input.file}`);
    if (facts.smooth) throw new InputError('maps too large for memory are not smoothed: leave --smooth out, or allow more memory (--memory)');
    const left = planes.filter((plane) => plane !== Q && plane !== U);
    for (const { input } of left) notes.push(`${input.file}: left aside, as Q and U are measured by rows (--memory)`);
    const { nx, ny, wcs, beam } = first;
    const rows = (plane: typeof Q, factor: number, from: number, to: number): Float64Array => plane.cube.rows(from, to).map((value) => factor * value);
    return {
      data: { frame: { nx, ny, wcs, ...(beam && { beam }) }, unit: Q.brightness, bands: [], notes: [...new Set(notes)] },
      channels: Q.channels,
      noise: Q.noise.map((rms, k) => Math.max(rms, U.noise[k])),
      source: { nx, ny, rows: (from, to) => ({ Q: rows(Q, Q.scale, from, to), U: rows(U, U.signOfU * U.scale, from, to) }) },
      close,
    };
  } catch (error) {
    close();
    throw error;
  }
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

function toBeam(plane: Plane, target: Beam | undefined, unit: BrightnessUnit, notes: string[]): Plane {
  if (!plane.beam || !target) return plane;
  const { wcs, nx, ny } = plane.image;
  const { values, noiseFactor } = convolveTo({ wcs, nx, ny, values: plane.values }, plane.beam, target, unit);
  if (noiseFactor !== 1) notes.push(`${plane.file}: smoothed to ${Number(target.majorArcsec.toPrecision(4))} x ${Number(target.minorArcsec.toPrecision(4))} arcsec; its noise becomes ${Number(noiseFactor.toPrecision(3))} times as large`);
  return { ...plane, values, noise: plane.noise.map((rms) => rms * noiseFactor), beam: target };
}

/** Planes of the same channels make a band, which needs Q and U. */
function gatherBands(planes: readonly Plane[]): MapBand[] {
  const groups: Plane[][] = [];
  const near = (a: number, b: number): boolean => Math.abs(a - b) <= 1e-9 * Math.abs(b);
  for (const plane of planes) {
    const group = groups.find(([first]) => first.channels.length === plane.channels.length && first.channels.every((channel, k) => near(channel.frequencyHz, plane.channels[k].frequencyHz)));
    if (!group) groups.push([plane]);
    else if (group.some(({ stokes }) => stokes === plane.stokes)) {
      throw new InputError(`Stokes ${plane.stokes} at ${plane.channels[0].frequencyHz / 1e9} GHz is given twice`, { file: plane.file });
    } else group.push(plane);
  }
  const bands = groups.map((group): MapBand => {
    const find = (stokes: Stokes): Plane | undefined => group.find((plane) => plane.stokes === stokes);
    const [I, Q, U] = [find('I'), find('Q'), find('U')];
    if (!Q || !U) throw new InputError(`no Stokes ${Q ? 'U' : 'Q'} goes with it: Q and U of the same channels are needed`, { file: group[0].file });
    const noise = Q.noise.map((rms, k) => Math.max(rms, U.noise[k]));
    return { name: bandName(Q), channels: Q.channels, Q: Q.values, U: U.values, noise, ...(I && { I: I.values }) };
  });
  const sorted = bands.sort((a, b) => a.channels[0].frequencyHz - b.channels[0].frequencyHz);
  return sorted.map((band, k) => {
    const twins = sorted.filter(({ name }, j) => name === band.name && j < k).length;
    return twins > 0 ? { ...band, name: `${band.name} (${twins + 1})` } : band;
  });
}

function bandName({ image, channels }: Plane): string {
  if (image.band !== undefined && image.band !== '') return image.band;
  const [low, high] = [channels[0], channels[channels.length - 1]].map(({ frequencyHz }) => frequencyHz);
  return `${Number(((low + high) / 2e9).toPrecision(4))} GHz`;
}
