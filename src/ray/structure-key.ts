import type { Scene } from '../scene/types.ts';
import type { SpectralPoint } from './integrand.ts';
import { orderedSteps } from './ordered-moments.ts';
import { isUnused } from './scene-graph.ts';

/** Two scenes of equal key differ in numbers only: what is compiled for one serves the other. */
export function structureKey(scene: Scene, spectrum: readonly SpectralPoint[]): string {
  const { cosmicRays, turbulence, numerics } = scene;
  const components = [...scene.field, ...scene.thermalElectrons, ...cosmicRays.layers];
  return JSON.stringify([
    components.map((component) => [
      component.name,
      component.model,
      component.choices,
      Object.keys(component.parameters).map((name) => [name, isUnused(component, name)]),
      'heightIndex' in component && component.heightIndex !== undefined,
      [component.arms !== undefined, component.flare?.law, component.hole !== undefined, component.filling !== undefined],
    ]),
    scene.field.length,
    scene.thermalElectrons.length,
    scene.freeFree !== undefined,
    [cosmicRays.equipartition !== undefined, cosmicRays.scaleTo !== undefined],
    turbulence.unresolved ? (turbulence.unresolved.follows ?? true) : false,
    turbulence.ordered ? [turbulence.ordered.along, turbulence.ordered.follows ?? true, orderedSteps(cosmicRays.index, numerics.tolerance).count] : false,
    turbulence.resolved ? [turbulence.resolved.cells, turbulence.resolved.follows, turbulence.resolved.profile, turbulence.resolved.electrons !== undefined] : false,
    spectrum,
  ]);
}
