import { modelLibrary } from '../model/library.ts';
import type { Scene } from '../scene/types.ts';
import type { SkyGrid } from './types.ts';

/** Widest lattice, pixels: more saves nothing. */
const widest = 16;
/** Cells that an image must have along each side to be worth a lattice. */
const fewestCells = 8;

/**
 * Every how many pixels a ray is followed before others: 1, or a power of two that is no longer
 * than the shortest length any component has for a parameter, so that nothing lies hidden between.
 * 1 where components have structure that no parameter tells of: formulas of the scene, and grids.
 */
export function imageStride(scene: Scene, { nx, ny, pixelKpc }: Pick<SkyGrid, 'nx' | 'ny' | 'pixelKpc'>): number {
  const shortest = shortestLengthKpc(scene);
  let stride = widest;
  while (stride > 1 && (stride * pixelKpc > shortest || Math.min(nx, ny) < fewestCells * stride)) stride /= 2;
  return stride;
}

/** The shortest length that a parameter of a scene's components has; 0 where there may be shorter ones. */
function shortestLengthKpc({ field, thermalElectrons, cosmicRays }: Scene): number {
  const known = new Set(modelLibrary().values());
  const lengths = [...field, ...thermalElectrons, ...cosmicRays.layers].flatMap(({ model, parameters, grids }) => {
    if (!known.has(model) || grids) return [0];
    return model.parameters.filter(({ unit }) => unit === 'kpc').map(({ name }) => Math.abs(parameters[name])).filter((length) => length > 0);
  });
  return Math.min(Infinity, ...lengths);
}
