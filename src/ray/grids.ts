import type { GriddedFunction, Scene } from '../scene/types.ts';
import { placedComponents } from './scene-graph.ts';

/** Every gridded function of a scene by the name that its graph knows it by. */
export function sceneGrids(scene: Scene): ReadonlyMap<string, GriddedFunction> {
  const { field, thermalElectrons, cosmicRays } = placedComponents(scene);
  const entries = [...field, ...thermalElectrons, ...cosmicRays].flatMap(({ path, component }) =>
    Object.entries(component.grids ?? {}).map(([name, grid]) => [`${path}/${name}`, grid] as const),
  );
  return new Map(entries);
}
