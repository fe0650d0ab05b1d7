import type { GridFile, GridSource } from '../field/grid-file.ts';
import { InputError } from '../units/input-error.ts';
import type { InputFile, Galaxy } from './types.ts';

/** What components of a scene may need beside the scene's text. */
export interface ComponentSources {
  /** A file of gridded numbers. Throws InputError where there is none. */
  readonly open: (file: string) => GridFile;
  /** Where rays go: what a grid must cover. */
  readonly volume: Galaxy['volume'];
}

/** Sources that note in `inputs`, by name, each file that is opened. Without a source of files every file is refused. */
export function noteSources(source: GridSource | undefined, volume: Galaxy['volume'], inputs: Map<string, InputFile>): ComponentSources {
  const open = (file: string): GridFile => {
    if (!source) throw new InputError(`the file "${file}" cannot be read here: this scene was given without its files`);
    const read = inWords(file, () => source(file));
    inputs.set(file, { file, sha256: read.sha256 });
    return read;
  };
  return { open, volume };
}

/** What is wrong with a file, told where the scene names it. */
function inWords(file: string, read: () => GridFile): GridFile {
  try {
    return read();
  } catch (error) {
    throw error instanceof InputError ? new InputError(`${file}: ${error.reason}`) : error;
  }
}
