import { dirname, resolve } from 'node:path';
import { readBytes } from '../files/node-io.ts';
import { readFits } from '../files/fits-read.ts';
import { skyImageFromFits } from '../files/sky-fits-read.ts';
import { makeDataSet, type LoadedEntry } from '../infer/dataset.ts';
import type { ReadMap } from '../infer/map-facts.ts';
import type { DataEntry } from '../infer/study-types.ts';
import type { DataSet } from '../infer/types.ts';
import { InputError } from '../units/input-error.ts';

/** A data set read from files, with what their readers assumed, a plain sentence each. */
export interface LoadedData {
  readonly data: DataSet;
  readonly notes: readonly string[];
}

/** Reads a study's data entries; files are found beside `baseFile`. Throws InputError for what is wrong. */
export function loadData(entries: readonly DataEntry[], baseFile: string): LoadedData {
  const notes: string[] = [];
  const folder = dirname(baseFile);
  const read = (file: string, entry: DataEntry): ReadMap => {
    const path = resolve(folder, file);
    const image = placed(entry, () => skyImageFromFits(readFits(readBytes(path), file), file, overridesOf(entry)));
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
  return { data: makeDataSet(loaded), notes: [...new Set(notes)] };
}

function overridesOf(entry: DataEntry): Parameters<typeof skyImageFromFits>[2] {
  return {
    ...(entry.frequencyHz !== undefined && { frequencyHz: entry.frequencyHz }),
    ...(entry.widthHz !== undefined && { widthHz: entry.widthHz }),
    ...(entry.beam && { beam: entry.beam }),
    ...(entry.convention && { convention: entry.convention }),
  };
}

function placed<T>({ place }: DataEntry, work: () => T): T {
  try {
    return work();
  } catch (error) {
    throw error instanceof InputError ? error.at(place) : error;
  }
}
