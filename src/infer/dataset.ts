import type { Beam } from '../scene/types.ts';
import type { BrightnessUnit, Channel } from '../sky/types.ts';
import { InputError } from '../units/input-error.ts';
import { convertQuantity, parseQuantity } from '../units/quantity.ts';
import { maskText, noiseText, signText, zeroLevelText } from './assumptions.ts';
import { mapBeam, mapChannels, mapUnit, noiseCorrelation, sameGrid, stokesPlanes } from './map-facts.ts';
import type { ReadMap } from './map-facts.ts';
import { sameBeam } from './pixel-axes.ts';
import type { PixelAxes } from './pixel-axes.ts';
import type { DataEntry, PlacedText } from './study-types.ts';
import type { DataBand, DataPlane, DataSet } from './types.ts';

/** A study's data entry with the maps that its files hold. */
export interface LoadedEntry {
  readonly entry: DataEntry;
  /** One per file of the entry. */
  readonly maps: readonly ReadMap[];
  readonly noiseMap?: ReadMap;
  readonly mask?: ReadMap;
}

/**
 * Makes one data set of a study's maps: units converted, signs brought to the IAU convention, zero
 * levels subtracted, masks applied, channels with the same beam gathered into bands. All that was
 * assumed is said in `assumptions`. Throws InputError that names the key to add where frequency,
 * beam, unit or noise is missing, and where grids or units do not agree.
 */
export function makeDataSet(loaded: readonly LoadedEntry[]): DataSet {
  if (loaded.length === 0 || loaded[0].maps.length === 0) throw new InputError('a study needs data');
  const first = loaded[0].maps[0];
  const axes: PixelAxes = { wcs: first.wcs, nx: first.nx, ny: first.ny };
  const unit = mapUnit(first, loaded[0].entry).brightness;
  const assumptions: string[] = [];
  const bands: DataBand[] = [];
  const planes: DataPlane[] = [];
  for (const item of loaded) {
    const { quantity } = item.entry;
    refuseOtherGrids(item, axes, first.file);
    const found = item.maps.flatMap((map) => readPlanes(item, map, axes, unit, assumptions));
    for (const group of sameBeams(found)) {
      const band = findBand(bands, group.map(({ channel }) => channel), group[0].beam);
      group.forEach(({ values, noise, correlation }, channel) => planes.push({ quantity, band, channel, values, noise, correlation }));
    }
  }
  refuseTwice(planes, bands);
  return { axes, unit, bands: named(bands), planes, assumptions: [...new Set(assumptions)] };
}

/** A plane of data before it has a band. */
interface FoundPlane extends Pick<DataPlane, 'values' | 'noise' | 'correlation'> {
  readonly channel: Channel;
  readonly beam?: Beam;
}

function refuseOtherGrids({ entry, maps, noiseMap, mask }: LoadedEntry, axes: PixelAxes, first: string): void {
  for (const map of [...maps, noiseMap, mask]) {
    if (map && !sameGrid(map, axes)) {
      throw new InputError(`${map.file} is on another grid than ${first}; bring all maps of a study to one grid`, entry.place);
    }
  }
}

/** The planes of one map in `unit`, with IAU signs. */
function readPlanes(item: LoadedEntry, map: ReadMap, axes: PixelAxes, unit: BrightnessUnit, assumptions: string[]): FoundPlane[] {
  const { entry, mask } = item;
  const stated = mapUnit(map, entry);
  if (stated.brightness !== unit) {
    throw new InputError(`${map.file} is in ${stated.text}, other maps in ${unit}; bring all to one unit`, entry.place);
  }
  const all = stokesPlanes(map, entry);
  const area = axes.nx * axes.ny;
  const count = all.length / area;
  const channels = mapChannels(map, entry, count, assumptions);
  const beam = mapBeam(map, entry, unit, assumptions);
  const correlation = noiseCorrelation(entry, beam, axes, map.file, assumptions);
  const scale = convertQuantity(1, stated.text, unit);
  const zero = entry.zeroLevel ? placedQuantity(entry.zeroLevel, unit) : 0;
  const convention = entry.convention ?? map.convention;
  const sign = signOf({ ...entry, convention });
  assumptions.push(...(map.notes ?? []).map((note) => `${map.file}: ${note}`));
  assumptions.push(...signText(map, entry), ...zeroLevelText(map.file, entry), ...noiseText(map.file, entry));
  let blank = 0;
  const planes = channels.map((channel, k) => {
    const values = all.slice(k * area, (k + 1) * area).map((value, p) => {
      if (mask !== undefined && !(Math.abs(mask.values[p]) > 0)) return NaN;
      if (!Number.isFinite(value)) blank++;
      return sign * (value * scale - zero);
    });
    return { values, noise: planeNoise(item, map, k, count, unit), correlation, channel, beam };
  });
  assumptions.push(...maskText(map.file, blank, all.length));
  return planes;
}

/** U changes sign where it is reversed, Q and U where angles are those of B (90 deg from E). */
function signOf({ quantity, convention, angleOf }: Pick<DataEntry, 'quantity' | 'convention' | 'angleOf'>): 1 | -1 {
  const reversed = quantity === 'U' && convention === 'U-reversed';
  const turned = quantity !== 'I' && angleOf === 'B';
  return reversed !== turned ? -1 : 1;
}

/** Noise of one plane: as the study says, else the noise map's, else the header's. */
function planeNoise({ entry, noiseMap }: LoadedEntry, map: ReadMap, channel: number, count: number, unit: BrightnessUnit): number | Float64Array {
  if (entry.noise) {
    const rms = placedQuantity(entry.noise, unit);
    if (!(rms > 0)) throw new InputError(`a noise of ${entry.noise.text} is given; allowed: above 0`, entry.noise.place);
    return rms;
  }
  if (!noiseMap) {
    const rms = map.noise?.[channel] ?? 0;
    if (rms > 0) return rms * convertQuantity(1, mapUnit(map, entry).text, unit);
    throw new InputError(`no noise is stated for ${map.file}; add \`noise: 20 uJy/beam\` or \`noiseMap: FILE\` to its data entry`, entry.place);
  }
  const area = noiseMap.nx * noiseMap.ny;
  const planes = noiseMap.values.length / area;
  if (planes !== 1 && planes !== count) {
    throw new InputError(`${noiseMap.file} holds ${planes} planes; allowed: 1, or ${count} as the data`, entry.place);
  }
  const from = planes === 1 ? 0 : channel * area;
  const ownUnit = noiseMap.unit === '' ? entry : { ...entry, unit: undefined };
  const scale = convertQuantity(1, mapUnit(noiseMap, ownUnit).text, unit);
  return noiseMap.values.slice(from, from + area).map((value) => value * scale);
}

/** Planes with the same beam together, in order. */
function sameBeams(planes: readonly FoundPlane[]): FoundPlane[][] {
  const groups: FoundPlane[][] = [];
  for (const plane of planes) {
    const group = groups.find(([first]) => sameBeam(first.beam, plane.beam));
    if (group) group.push(plane);
    else groups.push([plane]);
  }
  return groups;
}

function placedQuantity({ text, place }: PlacedText, unit: BrightnessUnit): number {
  try {
    return parseQuantity(text, unit);
  } catch (error) {
    throw error instanceof InputError ? error.at(place) : error;
  }
}

/** The band of these channels and beam, made where it is new; frequencies agree to 1e-9. */
function findBand(bands: DataBand[], channels: readonly Channel[], beam: Beam | undefined): number {
  const near = (a: number, b: number): boolean => Math.abs(a - b) <= 1e-9 * Math.abs(a);
  const known = bands.findIndex(
    (band) =>
      band.channels.length === channels.length &&
      band.channels.every(({ frequencyHz, widthHz }, k) => near(frequencyHz, channels[k].frequencyHz) && near(widthHz, channels[k].widthHz)) &&
      sameBeam(band.beam, beam),
  );
  return known >= 0 ? known : bands.push({ name: '', channels, beam }) - 1;
}

/** Bands named by their middle frequency, such as "1.5 GHz"; numbered where that is not unique. */
function named(bands: readonly DataBand[]): DataBand[] {
  const names = bands.map(({ channels }) => {
    const frequencies = channels.map(({ frequencyHz }) => frequencyHz);
    return `${Number(((Math.min(...frequencies) + Math.max(...frequencies)) / 2e9).toPrecision(4))} GHz`;
  });
  return bands.map((band, k) => {
    const twins = names.filter((name) => name === names[k]).length;
    return { ...band, name: twins > 1 ? `${names[k]} (${k + 1})` : names[k] };
  });
}

function refuseTwice(planes: readonly DataPlane[], bands: readonly DataBand[]): void {
  const seen = new Set<string>();
  for (const { quantity, band, channel } of planes) {
    const key = `${quantity} ${band} ${channel}`;
    if (seen.has(key)) {
      throw new InputError(`Stokes ${quantity} at ${bands[band].channels[channel].frequencyHz} Hz is given twice; data count once`);
    }
    seen.add(key);
  }
}
