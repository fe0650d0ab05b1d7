import type { FileSource } from '../../files/load-data.ts';
import { InputError, nearestHint } from '../../units/input-error.ts';

/** Files that the page holds, by name; a folder in the name does not matter where the rest is unique. */
export function memoryFiles(files: Readonly<Record<string, Uint8Array>>): FileSource {
  const bytes = (file: string): Uint8Array => {
    const found = findFile(files, file);
    if (found === undefined) throw new InputError(`there is no such file on the page${nearestHint(file, Object.keys(files))}: drop it here`, { file });
    return found;
  };
  return {
    bytes,
    text: (file) => {
      try {
        return new TextDecoder('utf-8', { fatal: true }).decode(bytes(file));
      } catch (error) {
        throw error instanceof InputError ? error : new InputError('the file is no UTF-8 text', { file });
      }
    },
  };
}

/** A file by its whole name, or by its last part: what is dropped on a page has lost its folder. */
export function findFile<Content>(files: Readonly<Record<string, Content>>, file: string): Content | undefined {
  const last = (name: string): string => name.replace(/^.*[/\\]/, '');
  if (Object.hasOwn(files, file)) return files[file];
  const same = Object.keys(files).filter((name) => last(name) === last(file));
  return same.length === 1 ? files[same[0]] : undefined;
}
