import { existsSync, mkdirSync } from 'node:fs';
import { join } from 'node:path';
import { journalsIn } from '../files/journal.ts';
import { readText, unwritable, writeWhole } from '../files/node-io.ts';
import { changesBetween, type SweepIdentity } from '../sweep/source.ts';
import { InputError } from '../units/input-error.ts';

/** Where the parts of a sweep lie in its folder. */
export interface SweepFolders {
  readonly out: string;
  /** Journals of rows, and whose rows they are. */
  readonly store: string;
  readonly maps: string;
  /** Scripts, tasks and messages of a cluster. */
  readonly cluster: string;
}

export function foldersOf(out: string): SweepFolders {
  return { out, store: join(out, 'store'), maps: join(out, 'maps'), cluster: join(out, 'cluster') };
}

/**
 * Makes the store of a sweep, or takes up the one that is there. Throws InputError where rows of a
 * sweep are there and `resume` was not asked for, where they are those of another sweep (naming what
 * has changed), and where the folder cannot be written.
 */
export function takeStore({ out, store }: SweepFolders, identity: SweepIdentity, resume: boolean): void {
  const path = join(store, 'sweep.json');
  if (existsSync(path)) {
    const rows = journalsIn(store).length > 0;
    if (rows && !resume) throw new InputError(`rows of a sweep are there already: --resume goes on with them; for a new sweep name another folder, or remove ${store}`, { flag: `--out ${out}` });
    const changed = changesBetween(readIdentity(path), identity);
    if (rows && changed.length > 0) {
      throw new InputError(`the rows in ${store} are those of another sweep and cannot be gone on with; changed since: ${changed.join('; ')}. Undo the change, or name another folder`, { flag: '--resume' });
    }
  }
  try {
    mkdirSync(store, { recursive: true });
  } catch (error) {
    throw unwritable(error, store);
  }
  writeWhole(path, `${JSON.stringify(identity, null, 1)}\n`);
}

function readIdentity(path: string): SweepIdentity {
  try {
    return JSON.parse(readText(path)) as SweepIdentity;
  } catch (error) {
    throw new InputError(`the file is damaged (${error instanceof Error ? error.message : String(error)}): it is not known whose rows these are`, { file: path });
  }
}
