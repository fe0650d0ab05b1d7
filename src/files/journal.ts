import { closeSync, existsSync, fsyncSync, mkdirSync, openSync, readdirSync, readSync, writeSync } from 'node:fs';
import { join } from 'node:path';
import { crc32 } from './crc32.ts';
import { unwritable } from './node-io.ts';
import { resourceError } from './resource-error.ts';

// A journal is a text file to which one writer appends a line per row: checksum, number of the row,
// its values. A line that was not written whole, or not as it was meant, has the wrong checksum and
// counts as never written. No journal is ever opened for writing twice, so a torn line can only be last.

/** Appends rows to a journal of its own. */
export class JournalWriter {
  private readonly file: number;

  /** Throws InputError where the place cannot be written. */
  constructor(readonly path: string) {
    try {
      this.file = openSync(path, 'wx');
    } catch (error) {
      throw unwritable(error, path);
    }
  }

  /** Appends one row; on return the system has it, also if this process dies. Throws ResourceError on a full disk. */
  append(row: number, values: ArrayLike<number>): void {
    const bytes = new TextEncoder().encode(journalLine(row, values));
    try {
      for (let offset = 0; offset < bytes.length; ) offset += writeSync(this.file, bytes, offset);
    } catch (error) {
      throw resourceError(error, this.path);
    }
  }

  /** Makes sure that a power cut loses nothing, and closes. */
  close(): void {
    try {
      fsyncSync(this.file);
    } finally {
      closeSync(this.file);
    }
  }
}

/** One line of a journal, its end included. Numbers read back as the same numbers. */
export function journalLine(row: number, values: ArrayLike<number>): string {
  const body = `${row} ${Array.from(values, (value) => (Object.is(value, -0) ? '-0' : String(value))).join(' ')}`;
  return `${checksum(body)} ${body}\n`;
}

/** A new journal in a folder, whose name no other has: `name`, a number, `.journal`. The folder is made. */
export function openJournal(folder: string, name: string): JournalWriter {
  try {
    mkdirSync(folder, { recursive: true });
  } catch (error) {
    throw unwritable(error, folder);
  }
  for (let k = 1; ; k++) {
    const path = join(folder, `${name}-${k}.journal`);
    if (existsSync(path)) continue;
    try {
      return new JournalWriter(path);
    } catch (error) {
      // Another writer was quicker.
      if (!existsSync(path)) throw error;
    }
  }
}

/** Every journal and part of a folder, in order of names; none where there is no folder. */
export function journalsIn(folder: string): string[] {
  if (!existsSync(folder)) return [];
  return readdirSync(folder).filter((name) => name.endsWith('.journal')).sort().map((name) => join(folder, name));
}

/** Where a row stands: which bytes of which file. */
export interface JournalPlace {
  readonly row: number;
  readonly offset: number;
  readonly length: number;
  readonly checksum: number;
}

const chunkBytes = 1 << 20;

/** Goes through a journal, a piece at a time: the places of good rows, and how many lines were not good. */
export function scanJournal(path: string, onRow: (place: JournalPlace) => void): { readonly dropped: number } {
  const file = openSync(path, 'r');
  let dropped = 0;
  try {
    const decoder = new TextDecoder('latin1');
    let rest = new Uint8Array(0);
    let start = 0;
    const chunk = new Uint8Array(chunkBytes);
    for (;;) {
      const count = readSync(file, chunk, 0, chunkBytes, start + rest.length);
      if (count === 0) break;
      const bytes = new Uint8Array(rest.length + count);
      bytes.set(rest);
      bytes.set(chunk.subarray(0, count), rest.length);
      let from = 0;
      for (let end = bytes.indexOf(10); end >= 0; end = bytes.indexOf(10, from)) {
        const line = decoder.decode(bytes.subarray(from, end));
        const row = rowOfLine(line);
        if (row === undefined) dropped++;
        else onRow({ row, offset: start + from, length: end - from, checksum: parseInt(line.slice(0, 8), 16) });
        from = end + 1;
      }
      rest = bytes.slice(from);
      start += from;
    }
    if (rest.length > 0) dropped++;
  } finally {
    closeSync(file);
  }
  return { dropped };
}

/** The values of a row, by the text of its line. */
export function journalValues(line: string): Float64Array {
  const parts = line.split(' ');
  return Float64Array.from({ length: parts.length - 2 }, (_, k) => Number(parts[k + 2]));
}

function rowOfLine(line: string): number | undefined {
  const match = /^([0-9a-f]{8}) (\d+) /.exec(line);
  if (!match || checksum(line.slice(9)) !== match[1]) return undefined;
  return Number(match[2]);
}

function checksum(text: string): string {
  return crc32(new TextEncoder().encode(text)).toString(16).padStart(8, '0');
}
