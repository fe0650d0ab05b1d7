import { scenePath } from '../scene/paths.ts';
import type { Scene } from '../scene/types.ts';

/** The scene of a hypothesis for values of its free parameters. */
export type SceneOf = (values: ArrayLike<number>) => Scene;

/** A scene with values set at paths; `values` in the units of the paths. */
export function sceneWith(scene: Scene, paths: readonly string[], values: ArrayLike<number>): Scene {
  return paths.reduce((changed, path, k) => scenePath(changed, path).set(changed, values[k]), scene);
}
