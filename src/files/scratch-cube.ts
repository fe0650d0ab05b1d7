import { randomUUID } from 'node:crypto';
import { closeSync, openSync, readSync, rmSync, writeSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import type { CubeSource } from '../sky/cube-source.ts';

/** A cube in a file of its own that is written channel by channel and gone when closed; single precision. */
export interface ScratchCube extends CubeSource {
  /** One channel, [row * nx + column]. */
  write(channel: number, plane: Float64Array): void;
  close(): void;
}

const width = 4;

/** Makes such a file in the system's folder for them. Throws the system's own error where the disk is full. */
export function makeScratchCube(nx: number, ny: number, channels: number): ScratchCube {
  const path = join(tmpdir(), `gyrelight-${randomUUID()}.scratch`);
  const file = openSync(path, 'wx+');
  let isOpen = true;
  const read = (position: number, count: number): Float32Array => {
    const values = new Float32Array(count);
    const bytes = new Uint8Array(values.buffer);
    for (let done = 0; done < bytes.length; ) {
      const got = readSync(file, bytes, done, bytes.length - done, position * width + done);
      if (got === 0) throw new Error('A scratch file is read where nothing was written.');
      done += got;
    }
    return values;
  };
  return {
    write: (channel, plane) => {
      const bytes = new Uint8Array(Float32Array.from(plane).buffer);
      const start = channel * nx * ny * width;
      for (let done = 0; done < bytes.length; ) done += writeSync(file, bytes, done, bytes.length - done, start + done);
    },
    rows: (from, to) => {
      const pixels = (to - from) * nx;
      const rows = new Float64Array(channels * pixels);
      for (let channel = 0; channel < channels; channel++) rows.set(read((channel * ny + from) * nx, pixels), channel * pixels);
      return rows;
    },
    plane: (channel) => Float64Array.from(read(channel * nx * ny, nx * ny)),
    close: () => {
      if (!isOpen) return;
      isOpen = false;
      closeSync(file);
      rmSync(path, { force: true });
    },
  };
}
