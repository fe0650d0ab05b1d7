import { closeSync, openSync, readSync } from 'node:fs';
import { journalsIn, journalValues, scanJournal } from './journal.ts';

/** Files kept open at once. */
const mostOpen = 64;

/**
 * The rows of a store: where each of them stands in which journal, about 24 bytes a row in memory,
 * however long the rows are. Rows are read in any order, so that journals of many writers merge into
 * one table in the order of rows.
 */
export class RowStore {
  private readonly files: readonly string[];
  private readonly fileOf: Uint32Array;
  private readonly offsetOf: Float64Array;
  private readonly lengthOf: Uint32Array;
  private readonly checksumOf: Uint32Array;
  private readonly open = new Map<number, number>();
  /** Rows that are there, and lines that were torn or damaged and count as never written. */
  readonly present: number;
  readonly dropped: number;

  /**
   * Reads where the rows 0 to `count` - 1 stand. The same row written twice by tasks that ran twice
   * counts once. Throws where it was written twice with different values, or a row is out of range:
   * such a store is not to be trusted. `files`: only these journals of the folder.
   */
  constructor(folder: string, readonly count: number, files: readonly string[] = journalsIn(folder)) {
    this.files = files;
    this.fileOf = new Uint32Array(count);
    this.offsetOf = new Float64Array(count);
    this.lengthOf = new Uint32Array(count);
    this.checksumOf = new Uint32Array(count);
    let [present, dropped] = [0, 0];
    this.files.forEach((path, k) => {
      dropped += scanJournal(path, ({ row, offset, length, checksum }) => {
        if (row >= count) throw new Error(`${path} holds row ${row} of a sweep of ${count} rows`);
        if (this.lengthOf[row] > 0) {
          if (this.checksumOf[row] !== checksum) throw new Error(`row ${row} stands in ${this.files[this.fileOf[row]]} and in ${path} with different values`);
          return;
        }
        [this.fileOf[row], this.offsetOf[row], this.lengthOf[row], this.checksumOf[row]] = [k, offset, length, checksum];
        present++;
      }).dropped;
    });
    this.present = present;
    this.dropped = dropped;
  }

  has(row: number): boolean {
    return this.lengthOf[row] > 0;
  }

  /** The values of a row. Throws where it is not there. */
  values(row: number): Float64Array {
    if (!this.has(row)) throw new Error(`row ${row} is not in the store`);
    const bytes = new Uint8Array(this.lengthOf[row]);
    readSync(this.handle(this.fileOf[row]), bytes, 0, bytes.length, this.offsetOf[row]);
    return journalValues(new TextDecoder('latin1').decode(bytes));
  }

  close(): void {
    for (const handle of this.open.values()) closeSync(handle);
    this.open.clear();
  }

  private handle(file: number): number {
    const known = this.open.get(file);
    if (known !== undefined) return known;
    if (this.open.size >= mostOpen) {
      const [oldest, handle] = [...this.open][0];
      closeSync(handle);
      this.open.delete(oldest);
    }
    const handle = openSync(this.files[file], 'r');
    this.open.set(file, handle);
    return handle;
  }
}
