import { randomUUID } from 'node:crypto';
import { closeSync, fsyncSync, mkdirSync, openSync, readdirSync, renameSync, rmdirSync, rmSync, writeSync } from 'node:fs';
import { basename, dirname, join } from 'node:path';
import { onesComplementSum } from './fits-checksum.ts';
import type { Provenance } from './fits-scene.ts';
import { blockedLength } from './fits-types.ts';
import { extensionBytes, imageHeaderBytes } from './fits-write.ts';
import { depthCubeUnits, type DepthCube } from './sky-fits-write.ts';

/** A cube over Faraday depth that is written rows by rows; the file appears under its name when finished. */
export interface DepthCubeStream {
  /** Values of rows `from` to `to` (not included), [depth * pixels + pixel]. Every row once. */
  write(from: number, to: number, values: Float64Array): void;
  finish(): void;
  /** Leaves nothing behind. */
  abandon(): void;
}

/** Begins such a file beside its place. */
export function streamDepthCube(path: string, cube: Omit<DepthCube, 'values'>, provenance: Provenance): DepthCubeStream {
  const { primary, tables } = depthCubeUnits(cube, provenance);
  const [nx, ny, depths] = primary.shape;
  const dataStart = imageHeaderBytes(primary, 0).length;
  const length = 4 * nx * ny * depths;
  const isNewFolder = mkdirSync(dirname(path), { recursive: true }) !== undefined;
  const beside = join(dirname(path), `.${basename(path)}.${randomUUID()}.part`);
  const file = openSync(beside, 'wx');
  let sum = 0;
  let isOpen = true;
  const put = (bytes: Uint8Array, position: number): void => {
    for (let done = 0; done < bytes.length; ) done += writeSync(file, bytes, done, bytes.length - done, position + done);
  };
  return {
    write: (from, to, values) => {
      const pixels = (to - from) * nx;
      const bytes = new Uint8Array(4 * pixels);
      const view = new DataView(bytes.buffer);
      for (let depth = 0; depth < depths; depth++) {
        for (let k = 0; k < pixels; k++) view.setFloat32(4 * k, values[depth * pixels + k]);
        // The sum does not depend on the order of its 4-byte words.
        sum = onesComplementSum(bytes, sum);
        put(bytes, dataStart + 4 * (depth * ny + from) * nx);
      }
    },
    finish: () => {
      let position = dataStart + blockedLength(length);
      put(new Uint8Array(position - dataStart - length), dataStart + length);
      for (const bytes of extensionBytes(tables)) {
        put(bytes, position);
        position += bytes.length;
      }
      put(imageHeaderBytes(primary, sum), 0);
      fsyncSync(file);
      closeSync(file);
      isOpen = false;
      renameSync(beside, path);
    },
    abandon: () => {
      if (isOpen) closeSync(file);
      isOpen = false;
      rmSync(beside, { force: true });
      if (isNewFolder && readdirSync(dirname(path)).length === 0) rmdirSync(dirname(path));
    },
  };
}
