import { randomUUID } from 'node:crypto';
import { closeSync, fsyncSync, mkdirSync, openSync, readdirSync, readFileSync, renameSync, rmSync, writeSync } from 'node:fs';
import { basename, dirname, join, resolve } from 'node:path';
import { InputError, nearestHint } from '../units/input-error.ts';
import type { FileSource } from './load-data.ts';
import { resourceError } from './resource-error.ts';

/** The bytes of a file. Throws InputError where it is missing (with the nearest name beside it) or cannot be read. */
export function readBytes(path: string): Uint8Array {
  try {
    const buffer = readFileSync(path);
    return new Uint8Array(buffer.buffer, buffer.byteOffset, buffer.byteLength);
  } catch (error) {
    throw new InputError(readReason(error, path), { file: path });
  }
}

/** The text of a UTF-8 file. Throws InputError where it cannot be read or is no UTF-8. */
export function readText(path: string): string {
  const bytes = readBytes(path);
  try {
    return new TextDecoder('utf-8', { fatal: true }).decode(bytes);
  } catch {
    throw new InputError('the file is no UTF-8 text', { file: path });
  }
}

/** Files named relative to the folder of `baseFile`. */
export function filesBeside(baseFile: string): FileSource {
  const folder = dirname(baseFile);
  return { bytes: (file) => readBytes(resolve(folder, file)), text: (file) => readText(resolve(folder, file)) };
}

/**
 * Write a file whole or not at all: beside its place, then renamed into it; folders are made.
 * Throws InputError where the place cannot be written (missing rights, a folder of that name), and
 * ResourceError where the disk is full or fails.
 */
export function writeWhole(path: string, content: Uint8Array | string): void {
  const bytes = typeof content === 'string' ? new TextEncoder().encode(content) : content;
  const beside = join(dirname(path), `.${basename(path)}.${randomUUID()}.part`);
  let isBegun = false;
  try {
    mkdirSync(dirname(path), { recursive: true });
    const file = openSync(beside, 'wx');
    isBegun = true;
    try {
      for (let offset = 0; offset < bytes.length; ) offset += writeSync(file, bytes, offset);
      fsyncSync(file);
    } finally {
      closeSync(file);
    }
    renameSync(beside, path);
  } catch (error) {
    if (isBegun) rmSync(beside, { force: true });
    throw unwritable(error, path);
  }
}

/** What a failed write becomes: InputError where the place is wrong, ResourceError where the disk is full or fails, else the error itself. */
export function unwritable(error: unknown, path: string): unknown {
  const reason = WRITE_REASONS[codeOf(error)];
  return reason === undefined ? resourceError(error, path) : new InputError(`cannot write the file: ${reason}`, { file: path });
}

const WRITE_REASONS: Readonly<Record<string, string>> = {
  EACCES: 'no right to write there',
  EPERM: 'no right to write there',
  EROFS: 'the disk is read-only',
  EISDIR: 'a folder has that name',
  ENOTDIR: 'a part of its path is a file, not a folder',
  EEXIST: 'a part of its path is a file, not a folder',
  ENAMETOOLONG: 'its name is too long',
};

function readReason(error: unknown, path: string): string {
  const code = codeOf(error);
  if (code === 'ENOENT') return `there is no such file${nearestHint(basename(path), neighbours(path))}`;
  if (code === 'EISDIR') return 'this is a folder, not a file';
  if (code === 'EACCES' || code === 'EPERM') return 'no right to read the file';
  if (code === 'ENOTDIR') return 'a part of its path is a file, not a folder';
  return `the file cannot be read: ${error instanceof Error ? error.message : String(error)}`;
}

function neighbours(path: string): string[] {
  try {
    return readdirSync(dirname(path));
  } catch {
    return [];
  }
}

function codeOf(error: unknown): string {
  return error instanceof Error && 'code' in error ? String(error.code) : '';
}
