import { randomUUID } from 'node:crypto';
import { closeSync, existsSync, fsyncSync, mkdirSync, openSync, readdirSync, readSync, renameSync, rmdirSync, rmSync, statSync, writeSync } from 'node:fs';
import { basename, dirname, join, resolve } from 'node:path';
import { onesComplementSum } from './fits-checksum.ts';
import { blockedLength, type ImageHdu, type TableHdu } from './fits-types.ts';
import { extensionBytes, imageHeaderBytes } from './fits-write.ts';
import { unwritable } from './node-io.ts';

/** A cube that is written part by part; the file appears under its name when finished. Every number once. */
export interface CubeStream {
  /** Values of rows `from` to `to` (not included) of all layers, [layer * pixels + pixel]. */
  writeRows(from: number, to: number, values: Float64Array): void;
  /** Values of whole layers from `first` on, [layer * ny * nx + row * nx + column]. */
  writeLayers(first: number, values: Float64Array): void;
  /** What has been written to such rows, as the file holds it. */
  readRows(from: number, to: number): Float64Array;
  finish(): void;
  /** Leaves nothing behind. */
  abandon(): void;
}

/**
 * Begins the file of a cube (values empty, its shape full) and the tables behind it, beside its place.
 * Throws, here and later, as `writeWhole` does: InputError where the place is wrong, ResourceError where the disk is full or fails.
 */
export function streamCube(path: string, { primary, tables }: { readonly primary: ImageHdu; readonly tables: readonly TableHdu[] }): CubeStream {
  const [nx, ny, layers = 1] = primary.shape;
  const width = Math.abs(primary.bitpix) / 8;
  const dataStart = imageHeaderBytes(primary, 0).length;
  const length = width * nx * ny * layers;
  const beside = join(dirname(path), `.${basename(path)}.${randomUUID()}.part`);
  const { file, madeFolder } = openBeside(beside, path);
  let sum = 0;
  let isOpen = true;
  const put = (bytes: Uint8Array, position: number): void => {
    orSay(path, () => {
      for (let done = 0; done < bytes.length; ) done += writeSync(file, bytes, done, bytes.length - done, position + done);
    });
  };
  const putValues = (values: Float64Array, layer: number, row: number): void => {
    const bytes = new Uint8Array(width * values.length);
    const view = new DataView(bytes.buffer);
    if (width === 4) for (let k = 0; k < values.length; k++) view.setFloat32(4 * k, values[k]);
    else for (let k = 0; k < values.length; k++) view.setFloat64(8 * k, values[k]);
    // The sum does not depend on the order of its 4-byte words.
    sum = onesComplementSum(bytes, sum);
    put(bytes, dataStart + width * (layer * ny + row) * nx);
  };
  return {
    writeRows: (from, to, values) => {
      const pixels = (to - from) * nx;
      for (let layer = 0; layer < layers; layer++) putValues(values.subarray(layer * pixels, (layer + 1) * pixels), layer, from);
    },
    writeLayers: (first, values) => {
      for (let layer = 0; layer < values.length / (nx * ny); layer++) putValues(values.subarray(layer * nx * ny, (layer + 1) * nx * ny), first + layer, 0);
    },
    readRows: (from, to) => {
      const pixels = (to - from) * nx;
      const values = new Float64Array(layers * pixels);
      const bytes = new Uint8Array(width * pixels);
      const view = new DataView(bytes.buffer);
      for (let layer = 0; layer < layers; layer++) {
        const position = dataStart + width * (layer * ny + from) * nx;
        for (let done = 0; done < bytes.length; ) {
          const read = readSync(file, bytes, done, bytes.length - done, position + done);
          if (read === 0) throw new Error(`rows ${from} to ${to} of ${basename(path)} are not there yet`);
          done += read;
        }
        for (let k = 0; k < pixels; k++) values[layer * pixels + k] = width === 4 ? view.getFloat32(4 * k) : view.getFloat64(8 * k);
      }
      return values;
    },
    finish: () => {
      let position = dataStart + blockedLength(length);
      put(new Uint8Array(position - dataStart - length), dataStart + length);
      for (const bytes of extensionBytes(tables)) {
        put(bytes, position);
        position += bytes.length;
      }
      put(imageHeaderBytes(primary, sum), 0);
      orSay(path, () => {
        fsyncSync(file);
        closeSync(file);
        isOpen = false;
        renameSync(beside, path);
      });
    },
    abandon: () => {
      if (isOpen) closeSync(file);
      isOpen = false;
      rmSync(beside, { force: true });
      if (madeFolder !== undefined) removeEmpty(dirname(resolve(path)), madeFolder);
    },
  };
}

function openBeside(beside: string, path: string): { readonly file: number; readonly madeFolder: string | undefined } {
  return orSay(path, () => {
    const madeFolder = mkdirSync(dirname(resolve(path)), { recursive: true });
    // Found out now rather than when all is written.
    if (statSync(path, { throwIfNoEntry: false })?.isDirectory()) throw Object.assign(new Error('a folder'), { code: 'EISDIR' });
    return { file: openSync(beside, 'wx+'), madeFolder };
  });
}

/** Removes a folder and those above it as far as the one that was made first, while they are empty. */
function removeEmpty(folder: string, madeFirst: string): void {
  for (let at = folder; at.startsWith(madeFirst) && existsSync(at) && readdirSync(at).length === 0; at = dirname(at)) rmdirSync(at);
}

function orSay<T>(path: string, work: () => T): T {
  try {
    return work();
  } catch (error) {
    throw unwritable(error, path);
  }
}
