import type { Beam } from '../scene/types.ts';
import type { BrightnessUnit, Channel } from '../sky/types.ts';
import { InputError } from '../units/input-error.ts';
import { convertQuantity, parseQuantity } from '../units/quantity.ts';
import { maskText, noiseText, signText, zeroLevelText } from './assumptions.ts';
import { mapBeam, mapChannels, mapUnit, noiseCorrelation, sameGrid } from './map-facts.ts';
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
  const { wcs, nx, ny } = loaded[0].maps[0];
  const axes: PixelAxes = { wcs, nx, ny };
  const assumptions: string[] = [];
  const bands: DataBand[] = [];
  const planes: DataPlane[] = [];
  const units = new Set<BrightnessUnit>();
  for (const item of loaded) {
    for (const [index, map] of item.maps.entries()) {
      checkMap(map, item, axes, loaded[0].maps[0].file);
      const unit = mapUnit(map, item.entry);
      units.add(unit.brightness);
      if (units.size > 1) {
        throw new InputError(`${map.file} is in ${unit.text}, other maps in ${[...units][0]}; bring all to one unit`, item.entry.place);
      }
      const channels = mapChannels(map, item.entry, assumptions);
      const beam = mapBeam(map, item.entry, unit.brightness, assumptions);
      const correlation = noiseCorrelation(item.entry, beam, axes, map.file, assumptions);
      const scale = convertQuantity(1, unit.text, unit.brightness);
      const prepared = preparePlanes(item, index, scale, unit.brightness, assumptions);
      const band = findBand(bands, channels, beam);
      prepared.forEach(({ values, noise }, channel) =>
        planes.push({ quantity: item.entry.quantity, band, channel, values, noise, correlation }),
      );
    }
  }
  refuseTwice(planes, bands);
  return { axes, unit: [...units][0], bands: named(bands), planes, assumptions: [...new Set(assumptions)] };
}

function checkMap(map: ReadMap, { entry, noiseMap, mask }: LoadedEntry, axes: PixelAxes, first: string): void {
  for (const other of [map, noiseMap, mask]) {
    if (other && !sameGrid(other, axes)) {
      throw new InputError(`${other.file} is on another grid than ${first}; bring all maps of a study to one grid`, entry.place);
    }
  }
  if (map.quantity !== undefined && map.quantity !== entry.quantity) {
    throw new InputError(`${map.file} holds Stokes ${map.quantity} by its header, not ${entry.quantity}`, entry.place);
  }
}

/** Values and noise of the planes of one map, in `unit`, with IAU signs. */
function preparePlanes(
  item: LoadedEntry, index: number, scale: number, unit: BrightnessUnit, assumptions: string[],
): { values: Float64Array; noise: number | Float64Array }[] {
  const { entry, maps, mask } = item;
  const map = maps[index];
  const area = map.nx * map.ny;
  const zero = entry.zeroLevel ? placedQuantity(entry.zeroLevel, unit) : 0;
  const sign = signOf(entry);
  assumptions.push(...signText(map.file, entry), ...zeroLevelText(map.file, entry), ...noiseText(map.file, entry));
  const count = map.values.length / area;
  if (!Number.isInteger(count)) throw new Error(`${map.file} holds ${map.values.length} values, no whole number of ${map.nx} x ${map.ny} planes.`);
  let blank = 0;
  const planes = Array.from({ length: count }, (_, channel) => {
    const values = map.values.slice(channel * area, (channel + 1) * area).map((value, p) => {
      const hidden = mask !== undefined && !(Math.abs(mask.values[p]) > 0);
      if (hidden) return NaN;
      if (!Number.isFinite(value)) blank++;
      return sign * (value * scale - zero);
    });
    return { values, noise: planeNoise(item, channel, count, unit) };
  });
  assumptions.push(...maskText(map.file, blank, map.values.length));
  return planes;
}

/** U changes sign where it is reversed, Q and U where angles are those of B (90 deg from E). */
function signOf({ quantity, convention, angleOf }: DataEntry): 1 | -1 {
  const reversed = quantity === 'U' && convention === 'U-reversed';
  const turned = quantity !== 'I' && angleOf === 'B';
  return reversed !== turned ? -1 : 1;
}

function planeNoise({ entry, noiseMap, maps }: LoadedEntry, channel: number, count: number, unit: BrightnessUnit): number | Float64Array {
  if (entry.noise) {
    const rms = placedQuantity(entry.noise, unit);
    if (!(rms > 0)) throw new InputError(`a noise of ${entry.noise.text} is given; allowed: above 0`, entry.noise.place);
    return rms;
  }
  if (!noiseMap) {
    throw new InputError(`no noise is stated for ${maps[0].file}; add \`noise: 20 uJy/beam\` or \`noiseMap: FILE\` to its data entry`, entry.place);
  }
  const text = mapUnit(noiseMap, entry).text;
  const area = noiseMap.nx * noiseMap.ny;
  const planes = noiseMap.values.length / area;
  if (planes !== 1 && planes !== count) {
    throw new InputError(`${noiseMap.file} holds ${planes} planes; allowed: 1, or ${count} as the data`, entry.place);
  }
  const from = planes === 1 ? 0 : channel * area;
  const scale = convertQuantity(1, text, unit);
  return noiseMap.values.slice(from, from + area).map((value) => value * scale);
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
