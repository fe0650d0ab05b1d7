import { readFits } from '../files/fits-read.ts';
import { openCubeRows } from '../files/fits-rows.ts';
import { readBytes } from '../files/node-io.ts';
import { skyImageFromFits } from '../files/sky-fits-read.ts';
import type { SkyImage } from '../files/sky-image.ts';
import { sameGrid } from '../infer/map-facts.ts';
import type { MapFrame } from '../measure/disc.ts';
import type { Beam } from '../scene/types.ts';
import { commonBeam } from '../sky/common-beam.ts';
import { cubeInMemory, type CubeSource } from '../sky/cube-source.ts';
import type { BrightnessUnit, Channel } from '../sky/types.ts';
import { InputError } from '../units/input-error.ts';
import { fileFacts, parseInput, type MapInput, type MapStokes, type StatedFacts } from './measure-facts.ts';
import { smoothed, type Smoothing } from './measure-smooth.ts';

/** One band of maps on a common grid with a common beam, IAU signs. */
export interface MapBand {
  readonly name: string;
  readonly channels: readonly Channel[];
  readonly I?: CubeSource;
  readonly Q: CubeSource;
  readonly U: CubeSource;
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

/** Maps read, or open for reading; `close` when done with them. */
export interface OpenMaps {
  readonly data: MapData;
  /** What has to be smoothed before the cubes can be used. */
  readonly smoothings: readonly Smoothing[];
  /** Whether cubes are read by rows. */
  readonly isLarge: boolean;
  close(): void;
}

/** One Stokes parameter of a file. */
export interface Plane {
  readonly stokes: MapStokes;
  readonly file: string;
  readonly image: Omit<SkyImage, 'values'>;
  readonly channels: readonly Channel[];
  readonly cube: CubeSource;
  readonly noise: Float64Array;
  readonly beam?: Beam;
}

/** Bytes that a number of a map takes while maps are read and measured in memory: as read, scaled, smoothed. */
const bytesInMemory = 32;

/**
 * Reads maps; where holding them would take more than `memoryBytes` their rows are read as they are
 * needed. Throws InputError for what is missing, does not fit together, or is packed so that rows cannot
 * be read.
 */
export function openMaps(inputs: readonly string[], facts: StatedFacts, memoryBytes: number): OpenMaps {
  const parsed = inputs.map((text) => parseInput(text, facts));
  const opened = parsed.map(({ file, overrides }) => openCubeRows(file, file, overrides));
  const close = (): void => opened.forEach((rows) => rows?.close());
  try {
    const numbers = opened.reduce((sum, rows) => sum + (rows?.count ?? 0), 0);
    const isLarge = numbers * bytesInMemory > memoryBytes;
    const notes: string[] = [];
    const units = new Set<BrightnessUnit>();
    const planes = parsed.flatMap((input, k) => {
      const rows = opened[k];
      if (!isLarge) return planesInMemory(input, facts, units, notes);
      if (!rows) throw new InputError('the maps are too large for memory (--memory), and this file cannot be read by rows: unpack it, with its axes in the order RA, Dec, frequency', { file: input.file });
      const read = { ...rows.facts, count: rows.count, rows: (stokes: number, factor: number): CubeSource => scaledRows(rows, stokes, factor) };
      return planesOf(input, read, facts, units, notes);
    });
    if (units.size > 1) throw new InputError(`some maps are in Jy/beam and others in Jy/sr; bring all to one unit`);
    checkGrids(planes);
    const [unit] = units;
    const beam = targetBeam(planes, facts);
    const smoothings: Smoothing[] = [];
    const bands = gatherBands(planes.map((plane) => smoothed(plane, beam, unit, isLarge, smoothings, notes)));
    const { wcs, nx, ny } = planes[0].image;
    const data = { frame: { nx, ny, wcs, ...(beam && { beam }) }, unit, bands, notes: [...new Set(notes)] };
    const closeAll = (): void => {
      close();
      smoothings.forEach((smoothing) => smoothing.close());
    };
    return { data, smoothings, isLarge, close: closeAll };
  } catch (error) {
    close();
    throw error;
  }
}

/** What a file holds, and its cubes: `rows` gives one Stokes parameter times a factor. */
interface FileCubes extends Omit<SkyImage, 'values'> {
  readonly count: number;
  rows(stokes: number, factor: number): CubeSource;
}

function planesInMemory(input: MapInput, facts: StatedFacts, units: Set<BrightnessUnit>, notes: string[]): Plane[] {
  const image = skyImageFromFits(readFits(readBytes(input.file), input.file), input.file, input.overrides);
  const { nx, ny, values } = image;
  const size = (image.channels?.length ?? 1) * nx * ny;
  const rows = (stokes: number, factor: number): CubeSource => cubeInMemory(values.subarray(stokes * size, (stokes + 1) * size).map((value) => factor * value), nx, ny);
  return planesOf(input, { ...image, count: values.length, rows }, facts, units, notes);
}

function scaledRows(rows: NonNullable<ReturnType<typeof openCubeRows>>, stokes: number, factor: number): CubeSource {
  const scale = (values: Float64Array): Float64Array => values.map((value) => factor * value);
  return { rows: (from, to) => scale(rows.rows(from, to, stokes)), plane: (channel) => scale(rows.plane(channel, stokes)) };
}

function planesOf(input: MapInput, image: FileCubes, facts: StatedFacts, units: Set<BrightnessUnit>, notes: string[]): Plane[] {
  const { file } = input;
  const { stokes, channels, brightness, scale, signOfU, noise } = fileFacts(image, input, facts, notes);
  units.add(brightness);
  if (image.count !== channels.length * image.nx * image.ny * stokes.length) {
    throw new InputError(`${image.count / image.nx / image.ny} planes for ${channels.length} channels of Stokes ${stokes.join(', ')}`, { file });
  }
  return stokes.flatMap((name, k): Plane[] => {
    if (name === 'V') return [];
    const cube = image.rows(k, name === 'U' ? signOfU * scale : scale);
    return [{ stokes: name, file, image, channels, cube, noise, ...(image.beam && { beam: image.beam }) }];
  });
}

function checkGrids(planes: readonly Plane[]): void {
  const [first] = planes;
  for (const other of planes) {
    if (!sameGrid({ ...other.image, values: new Float64Array(0), file: other.file }, first.image)) {
      throw new InputError(`${other.file} is on another grid than ${first.file}; bring all maps to one grid`);
    }
  }
}

function targetBeam(planes: readonly Plane[], facts: StatedFacts): Beam | undefined {
  const beams = planes.flatMap(({ beam }) => (beam ? [beam] : []));
  const bare = planes.find(({ beam }) => !beam);
  if (bare && beams.length > 0) throw new InputError(`${bare.file} states no beam and other maps do; state it with --beam`);
  return beams.length > 0 ? (facts.smooth ?? commonBeam(beams)) : undefined;
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
    const find = (stokes: MapStokes): Plane | undefined => group.find((plane) => plane.stokes === stokes);
    const [I, Q, U] = [find('I'), find('Q'), find('U')];
    if (!Q || !U) throw new InputError(`no Stokes ${Q ? 'U' : 'Q'} goes with it: Q and U of the same channels are needed`, { file: group[0].file });
    const noise = Q.noise.map((rms, k) => Math.max(rms, U.noise[k]));
    return { name: bandName(Q), channels: Q.channels, Q: Q.cube, U: U.cube, noise, ...(I && { I: I.cube }) };
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
