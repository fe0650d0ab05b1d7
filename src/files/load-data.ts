import { makeDataSet, type LoadedEntry } from '../infer/dataset.ts';
import type { ReadMap } from '../infer/map-facts.ts';
import { readOther, type LoadedOther, type ReadTable } from '../infer/read-other.ts';
import type { DataEntry, OtherEntry } from '../infer/study-types.ts';
import type { DataSet } from '../infer/types.ts';
import { InputError } from '../units/input-error.ts';
import { csvNumbers, parseCsv } from './csv-parse.ts';
import { readFits } from './fits-read.ts';
import { skyImageFromFits } from './sky-fits-read.ts';

/** Where a study's files are: beside it on disk, or among those dropped on the page. */
export interface FileSource {
  /** Throws InputError where there is no such file. */
  readonly bytes: (file: string) => Uint8Array;
  /** The same as UTF-8 text. */
  readonly text: (file: string) => string;
}

/** A data set read from files, with what their readers assumed, a plain sentence each. */
export interface LoadedData {
  readonly data: DataSet;
  readonly notes: readonly string[];
}

/** Reads a study's data entries from `source`. Throws InputError for what is wrong. */
export function loadData(entries: readonly DataEntry[], source: FileSource, others: readonly OtherEntry[] = []): LoadedData {
  const notes: string[] = [];
  const read = (file: string, entry: DataEntry): ReadMap => {
    const image = placed(entry, () => skyImageFromFits(readFits(source.bytes(file), file), file, overridesOf(entry)));
    notes.push(...image.notes.map((note) => `${file}: ${note}`));
    return { ...image, file };
  };
  const loaded = entries.map(
    (entry): LoadedEntry => ({
      entry,
      maps: entry.files.map((file) => read(file, entry)),
      ...(entry.noiseMap !== undefined && { noiseMap: read(entry.noiseMap, { ...entry, frequencyHz: undefined }) }),
      ...(entry.mask !== undefined && { mask: read(entry.mask, { ...entry, frequencyHz: undefined }) }),
    }),
  );
  const otherMap = (file: string, entry: OtherEntry): ReadMap => read(file, { ...entry, quantity: 'Q', files: [], noise: undefined, unit: undefined });
  const loadedOthers = others.map((entry): LoadedOther =>
    entry.kind === 'map'
      ? { entry, map: otherMap(entry.file, entry), ...(entry.mask !== undefined && { mask: otherMap(entry.mask, { ...entry, frequencyHz: undefined }) }) }
      : { entry, table: tableOf(source, entry) },
  );
  const maps = loaded.length > 0 ? makeDataSet(loaded) : emptyDataSet(loadedOthers);
  const assumptions: string[] = [];
  const seen = loadedOthers.map((one) => readOther(one, maps, assumptions));
  const data: DataSet = others.length === 0 ? maps : { ...maps, others: seen, assumptions: [...new Set([...maps.assumptions, ...assumptions])] };
  return { data, notes: [...new Set(notes)] };
}

/** A data set without Stokes maps, on the grid of its first other map. */
function emptyDataSet(others: readonly LoadedOther[]): DataSet {
  const first = others.find((one): one is Extract<LoadedOther, { map: ReadMap }> => 'map' in one);
  if (!first) throw new InputError('a study needs at least one map among its data; its grid is the one that the model is brought to', others[0]?.entry.place);
  const { wcs, nx, ny, unit } = first.map;
  return { axes: { wcs, nx, ny }, unit: unit === 'Jy/sr' ? 'Jy/sr' : 'Jy/beam', bands: [], planes: [], assumptions: [] };
}

function tableOf(source: FileSource, entry: OtherEntry): ReadTable {
  return placed(entry, () => {
    const table = parseCsv(source.text(entry.file), entry.file);
    return { file: entry.file, rows: table.rows.length, units: table.units, column: (name) => csvNumbers(table, name) };
  });
}

function overridesOf(entry: DataEntry): Parameters<typeof skyImageFromFits>[2] {
  return {
    ...(entry.frequencyHz !== undefined && { frequencyHz: entry.frequencyHz }),
    ...(entry.widthHz !== undefined && { widthHz: entry.widthHz }),
    ...(entry.beam && { beam: entry.beam }),
    ...(entry.convention && { convention: entry.convention }),
  };
}

function placed<T>({ place }: Pick<DataEntry, 'place'>, work: () => T): T {
  try {
    return work();
  } catch (error) {
    throw error instanceof InputError ? error.at(place) : error;
  }
}
