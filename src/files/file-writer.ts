import { randomUUID } from 'node:crypto';
import { closeSync, fsyncSync, mkdirSync, openSync, renameSync, rmSync, writeSync } from 'node:fs';
import { basename, dirname, join } from 'node:path';
import { unwritable } from './node-io.ts';

/** Text is gathered to pieces of this length before it is written. */
const pieceLength = 1 << 18;

/**
 * Writes a file piece by piece that is there whole in the end or not at all: beside its place, then
 * renamed into it. Throws InputError where the place cannot be written, ResourceError on a full disk;
 * nothing is left of it then.
 */
export class FileWriter {
  private readonly beside: string;
  private readonly file: number;
  private text = '';
  private isOpen = true;

  constructor(private readonly path: string) {
    this.beside = join(dirname(path), `.${basename(path)}.${randomUUID()}.part`);
    try {
      mkdirSync(dirname(path), { recursive: true });
      this.file = openSync(this.beside, 'wx');
    } catch (error) {
      throw unwritable(error, path);
    }
  }

  add(piece: string | Uint8Array): void {
    if (typeof piece === 'string') {
      this.text += piece;
      if (this.text.length >= pieceLength) this.drain();
      return;
    }
    this.drain();
    this.write(piece);
  }

  /** Puts the file into its place. */
  finish(): void {
    this.drain();
    try {
      fsyncSync(this.file);
      renameSync(this.beside, this.path);
    } catch (error) {
      this.abandon();
      throw unwritable(error, this.path);
    }
    this.isOpen = false;
    closeSync(this.file);
  }

  /** Leaves nothing behind, for when something else went wrong; does nothing once the file is in its place. */
  abandon(): void {
    if (!this.isOpen) return;
    this.isOpen = false;
    closeSync(this.file);
    rmSync(this.beside, { force: true });
  }

  private drain(): void {
    if (this.text === '') return;
    const bytes = new TextEncoder().encode(this.text);
    this.text = '';
    this.write(bytes);
  }

  private write(bytes: Uint8Array): void {
    try {
      for (let offset = 0; offset < bytes.length; ) offset += writeSync(this.file, bytes, offset);
    } catch (error) {
      this.abandon();
      throw unwritable(error, this.path);
    }
  }
}
