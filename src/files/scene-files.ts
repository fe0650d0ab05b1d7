import type { GridSource } from '../field/grid-file.ts';
import { gridSource } from './grid-source.ts';
import { filesBeside } from './node-io.ts';

/** Gridded numbers that a scene file names, read from beside it. */
export function gridsBeside(sceneFile: string): GridSource {
  return gridSource(filesBeside(sceneFile));
}
