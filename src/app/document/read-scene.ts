import { gridSource } from '../../files/grid-source.ts';
import { parseScene } from '../../scene/parse-scene.ts';
import type { Scene } from '../../scene/types.ts';
import { InputError } from '../../units/input-error.ts';
import { memoryFiles } from '../compute/memory-files.ts';
import type { PageFiles } from '../store.ts';

/** A checked scene, or what is wrong with its text. */
export type ReadScene = { readonly scene: Scene; readonly error?: undefined } | { readonly scene?: undefined; readonly error: InputError };

/** The last readings: a page asks for the same few scenes again and again. */
const known = new Map<string, ReadScene>();
const most = 32;

/** Reads a scene's text, its gridded numbers from the page's files; the same text is read once. */
export function readScene(text: string, name: string, files: PageFiles): ReadScene {
  const gridded = Object.keys(files).filter((file) => text.includes(file));
  const key = JSON.stringify([name, text, gridded.map((file) => [file, files[file].length])]);
  const before = known.get(key);
  if (before) return before;
  const read = attempt(text, name, files);
  if (known.size >= most) known.delete([...known.keys()][0]);
  known.set(key, read);
  return read;
}

function attempt(text: string, name: string, files: PageFiles): ReadScene {
  try {
    return { scene: parseScene(text, name, [], gridSource(memoryFiles(files))) };
  } catch (error) {
    if (error instanceof InputError) return { error };
    throw error;
  }
}
