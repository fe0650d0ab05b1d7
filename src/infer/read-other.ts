import { defaultRing } from '../measure/ring-profile.ts';
import type { Channel } from '../sky/types.ts';
import { InputError } from '../units/input-error.ts';
import { convertQuantity, parseQuantity } from '../units/quantity.ts';
import { mapBeam, mapChannels, sameGrid } from './map-facts.ts';
import type { ReadMap } from './map-facts.ts';
import type { OtherData } from './other-data.ts';
import { beamPixels } from './pixel-axes.ts';
import type { PixelAxes } from './pixel-axes.ts';
import type { OtherEntry } from './study-types.ts';
import type { DataSet } from './types.ts';

/** A table's columns as numbers, by name; throws InputError for a name that it has not. */
export interface ReadTable {
  readonly file: string;
  readonly rows: number;
  readonly units: Readonly<Record<string, string>>;
  readonly column: (name: string) => Float64Array;
}

/** An entry of other data with what its file holds. */
export type LoadedOther =
  | { readonly entry: OtherEntry; readonly map: ReadMap; readonly mask?: ReadMap }
  | { readonly entry: OtherEntry; readonly table: ReadTable };

/** The unit in which each quantity is compared. */
const ownUnits = { chi: 'rad', RM: 'rad/m^2' } as const;

/**
 * The data of an entry that is no Stokes map, in the units of a data set, with sentences on what was
 * assumed. Throws InputError, placed in the study, for what is missing or does not fit.
 */
export function readOther(loaded: LoadedOther, data: Pick<DataSet, 'axes' | 'unit'>, assumptions: string[]): OtherData {
  const { entry } = loaded;
  try {
    return 'map' in loaded ? readMap(loaded.entry, loaded.map, loaded.mask, data, assumptions) : readTable(entry, loaded.table, data, assumptions);
  } catch (error) {
    throw error instanceof InputError ? error.at(entry.place) : error;
  }
}

function readMap(entry: OtherEntry, map: ReadMap, mask: ReadMap | undefined, { axes, unit }: Pick<DataSet, 'axes' | 'unit'>, assumptions: string[]): OtherData {
  const { quantity } = entry;
  for (const one of [map, mask]) if (one && !sameGrid(one, axes)) throw new InputError(`${one.file} is on another grid than the other maps; bring all maps of a study to one grid`);
  if (map.quantity !== undefined && map.quantity !== quantity) throw new InputError(`${map.file} holds ${map.quantity} by its header, not ${quantity}`);
  const own = quantity === 'P' ? unit : ownUnits[quantity];
  const stated = entry.unit?.text ?? (map.unit === '' && quantity === 'chi' ? 'rad' : map.unit);
  if (stated === '') throw new InputError(`${map.file} does not say its unit; add \`unit: ${own}\` (or what it is) to its data entry`);
  const scale = convertQuantity(1, stated === 'rad m-2' || stated === 'rad/m2' ? 'rad/m^2' : stated, own);
  const pixels = axes.nx * axes.ny;
  const count = map.values.length / pixels;
  const channels = quantity === 'RM' ? sourceChannels(entry) : mapChannels(map, mapEntry(entry), count, assumptions);
  if (quantity === 'RM' && count !== 1) throw new InputError(`${map.file} holds ${count} planes; allowed: one map of RM`);
  const beam = mapBeam(map, mapEntry(entry), unit, assumptions);
  const shift = quantity === 'chi' && entry.angleOf === 'B' ? Math.PI / 2 : 0;
  const sigma = noiseOf(entry, own);
  const values = map.values.map((value, k) => (mask && !(Math.abs(mask.values[k % pixels]) > 0) ? NaN : value * scale + shift));
  assumptions.push(`${map.file}: ${quantity} is compared pixel by pixel, each counted as its share of a beam: an approximation; Q and U are better where they exist.`);
  if (quantity === 'P') assumptions.push(`${map.file}: P is taken as measured, not debiased; its noise bias is part of the likelihood (Rice).`);
  if (quantity === 'chi' && entry.angleOf === undefined) assumptions.push(`${map.file}: angles assumed to be those of the electric vector; state \`angleOf: E\` or \`B\`.`);
  return {
    quantity, kind: 'map', label: map.file, values, sigma: new Float64Array(values.length).fill(sigma),
    weight: beam ? Math.min(1, 1 / beamPixels(axes, beam)) : 1, channels, ...(beam && { beam }),
  };
}

function readTable(entry: OtherEntry, table: ReadTable, { axes, unit }: { readonly axes: PixelAxes; readonly unit: string }, assumptions: string[]): OtherData {
  const { quantity, kind } = entry;
  if (table.rows === 0) throw new InputError(`${table.file} has no rows`);
  const column = (name: string, to: string): Float64Array => {
    const scale = convertQuantity(1, columnUnit(table, name, to), to);
    return table.column(name).map((value) => value * scale);
  };
  const error = (sigma: Float64Array): Float64Array => {
    const bad = sigma.findIndex((value) => !(value > 0));
    if (bad >= 0) throw new InputError(`${table.file}: the error in row ${bad + 1} is ${sigma[bad]}; allowed: above 0`);
    return sigma;
  };
  const label = table.file;
  if (kind === 'sources') {
    const scatter = entry.scatter === undefined ? 0 : parseQuantity(entry.scatter.text, 'rad/m^2');
    if (scatter === 0) assumptions.push(`${label}: sources are assumed without Faraday rotation and scatter of their own; add \`scatter: 10 rad/m^2\` where they have.`);
    const [ra, dec] = [column('ra', 'deg'), column('dec', 'deg')];
    return {
      quantity: 'RM', kind, label, weight: 1, channels: [],
      values: column('rm', 'rad/m^2'), sigma: error(column('error', 'rad/m^2')).map((value) => Math.hypot(value, scatter)),
      places: Array.from(ra, (raDeg, k) => ({ raDeg, decDeg: dec[k] })),
    };
  }
  if (kind === 'spectrum') {
    const channels = Array.from(column('frequency', 'Hz'), (frequencyHz): Channel => ({ frequencyHz, widthHz: entry.widthHz ?? 0 }));
    assumptions.push(`${label}: light of the whole galaxy is compared with all that the image of the other maps shows of the model.`);
    return { quantity: 'P', kind, label, weight: 1, channels, values: column('value', 'Jy'), sigma: error(column('error', 'Jy')) };
  }
  // A profile round a ring.
  const azimuth = column('azimuth', 'deg');
  const sectors = table.rows;
  azimuth.forEach((value, k) => {
    const off = value - (360 * k) / sectors;
    if (Math.abs(off) > 1) throw new InputError(`${label}: row ${k + 1} is at azimuth ${value} deg; ${sectors} equal sectors, the first centred on 0, would have ${(360 * k) / sectors} deg there`);
  });
  const own = quantity === 'P' ? unit : ownUnits[quantity];
  if (!entry.ringKpc) throw new InputError('a profile needs `ring: [4 kpc, 7 kpc]`, its inner and outer radius');
  const channels = quantity === 'RM' ? sourceChannels(entry) : entry.frequencyHz === undefined ? undefined : [{ frequencyHz: entry.frequencyHz, widthHz: entry.widthHz ?? 0 }];
  if (!channels) throw new InputError('a profile needs its `frequency`, such as 1.4 GHz');
  if (quantity === 'P') assumptions.push(`${label}: the profile is taken as the mean of debiased P in each sector, with Gaussian errors.`);
  if (!entry.beam && axes.nx > 0) assumptions.push(`${label}: no beam is stated; assumed sharp.`);
  return {
    quantity, kind, label, weight: 1, channels, ...(entry.beam && { beam: entry.beam }),
    values: column('value', own), sigma: error(column('error', own)),
    ring: { ...defaultRing(1), innerKpc: entry.ringKpc[0], outerKpc: entry.ringKpc[1], sectors },
  };
}

/** A column's unit by the table's header, or the usual one. */
function columnUnit({ units }: ReadTable, name: string, to: string): string {
  const stated = units[name]?.replace(/^rad ?(m-2|\/m2)$/, 'rad/m^2');
  return stated ?? ({ Hz: 'Hz', rad: 'deg' }[to] ?? to);
}

/** The channels that rotation measures were made from. */
function sourceChannels({ fromHz, widthHz }: OtherEntry): Channel[] {
  if (!fromHz || fromHz.length < 2) throw new InputError('an RM needs the frequencies it was made from, such as `from: [1.4 GHz, 2.3 GHz]`');
  return fromHz.map((frequencyHz) => ({ frequencyHz, widthHz: widthHz ?? 0 }));
}

function noiseOf({ noise, quantity }: OtherEntry, unit: string): number {
  const example = { P: '20 uJy/beam', chi: '3 deg', RM: '5 rad/m^2' }[quantity];
  if (!noise) throw new InputError(`a map of ${quantity} needs its noise, such as \`noise: ${example}\``);
  const sigma = parseQuantity(noise.text, unit);
  if (!(sigma > 0)) throw new InputError(`a noise of ${noise.text} is given; allowed: above 0`);
  return sigma;
}

/** What `mapChannels` and `mapBeam` ask of an entry. */
function mapEntry({ frequencyHz, widthHz, beam, place }: OtherEntry): Parameters<typeof mapBeam>[1] {
  return { quantity: 'Q', files: [], frequencyHz, widthHz, beam, place };
}

