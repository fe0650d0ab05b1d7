import type { Provenance } from '../files/fits-scene.ts';
import { readText } from '../files/node-io.ts';
import { gridsBeside } from '../files/scene-files.ts';
import { parseScene, sceneText } from '../scene/parse-scene.ts';
import type { Override } from '../scene/overrides.ts';
import type { Scene } from '../scene/types.ts';
import { version } from '../files/version.ts';

/** A checked scene with the text and seed that outputs carry. */
export interface LoadedScene {
  readonly scene: Scene;
  readonly provenance: Provenance;
}

/** Reads and checks a scene file. Throws InputError with file:line:column, or the flag. */
export function loadScene(path: string, overrides: readonly Override[]): LoadedScene {
  const text = readText(path);
  const scene = parseScene(text, path, overrides, gridsBeside(path));
  const provenance = { sceneText: sceneText(text, path, overrides), version, seed: scene.numerics.seed, inputs: scene.inputs };
  return { scene, provenance };
}
