import { streamCube } from './cube-stream.ts';
import type { Provenance } from './fits-scene.ts';
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
  const { writeRows, finish, abandon } = streamCube(path, depthCubeUnits(cube, provenance));
  return { write: writeRows, finish, abandon };
}
