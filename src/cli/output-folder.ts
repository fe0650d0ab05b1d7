import { join } from 'node:path';
import { writeWhole } from '../files/node-io.ts';

/** A file too large to gather, written beside its place as it is made; it appears, or is gone, at the end. */
export interface BegunFile {
  finish(): void;
  abandon(): void;
}

/** Files of one run: gathered first, written together once everything has been computed. */
export class OutputFolder {
  private readonly files = new Map<string, Uint8Array | string>();
  private readonly begun = new Map<string, BegunFile>();

  constructor(readonly path: string) {}

  /** Keeps a file for writing; `name` may have folders in it. */
  add(name: string, content: Uint8Array | string): void {
    this.files.set(name, content);
  }

  /** Takes charge of a file that is being written already. */
  addBegun(name: string, file: BegunFile): void {
    this.begun.set(name, file);
  }

  get names(): readonly string[] {
    return [...this.files.keys(), ...this.begun.keys()];
  }

  /** Leaves nothing of the files that were begun; for a run that failed. */
  abandon(): void {
    // The first may have made the folder: it goes last.
    for (const file of [...this.begun.values()].reverse()) file.abandon();
  }

  /** Writes every file, each whole or not at all; folders are made as needed. */
  write(): void {
    try {
      for (const file of this.begun.values()) file.finish();
      for (const [name, content] of this.files) writeWhole(join(this.path, name), content);
    } catch (error) {
      this.abandon();
      throw error;
    }
  }
}

/** A name fit for a file or folder: lower-case words joined by hyphens. */
export function slug(name: string): string {
  const plain = name.normalize('NFKD').toLowerCase().replace(/[^a-z0-9]+/g, '-').replace(/^-+|-+$/g, '');
  return plain === '' ? 'unnamed' : plain;
}

/** A band's name as part of a file's name: `1.4 GHz (2)` becomes `1.4GHz-2`. */
export function bandFileName(name: string): string {
  return name.replace(/\s*\((\d+)\)/g, '-$1').replace(/[^A-Za-z0-9._-]+/g, '');
}
