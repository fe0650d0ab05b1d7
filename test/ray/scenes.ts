import { parseScene } from '../../src/scene/parse-scene.ts';
import type { Scene } from '../../src/scene/types.ts';
import type { SpectralPoint } from '../../src/ray/integrand.ts';
import { findMapScale, makeRayEngine, traceRays, type BackEnd } from '../../src/ray/trace.ts';
import type { RayResult } from '../../src/ray/types.ts';

/** The parts of a scene that tests of rays differ in; texts as in a scene file. */
export interface SceneParts {
  readonly inclination?: number;
  readonly positionAngle?: number;
  readonly radius?: number;
  readonly height?: number;
  readonly field: readonly string[];
  readonly electrons?: readonly string[];
  readonly index?: number;
  readonly layers: readonly string[];
  readonly turbulence?: string;
  /** Further keys at the top of the scene. */
  readonly more?: readonly string[];
  readonly tolerance?: number;
}

/** Builds and parses a scene text: what a user could write, and no other way round the checks. */
export function sceneOf(parts: SceneParts): Scene {
  const list = (items: readonly string[]): string => items.map((item) => `\n  - ${item}`).join('');
  return parseScene(
    [
      'gyrelight: 1',
      'title: test',
      `galaxy: {distance: 10 Mpc, inclination: ${parts.inclination ?? 0} deg, positionAngle: ${parts.positionAngle ?? 0} deg, volume: {radius: ${parts.radius ?? 15} kpc, height: ${parts.height ?? 6} kpc}}`,
      `field:${list(parts.field)}`,
      `thermalElectrons:${parts.electrons?.length === 0 ? ' []' : list(parts.electrons ?? ['{model: exponential-disc, density: 0.03 cm^-3, radius: 10 kpc, height: 1 kpc}'])}`,
      `cosmicRays:`,
      `  index: ${parts.index ?? 2.8}`,
      `  layers:${parts.layers.map((item) => `\n    - ${item}`).join('')}`,
      ...(parts.turbulence === undefined ? [] : [`turbulence: {unresolved: ${parts.turbulence}}`]),
      ...(parts.more ?? []),
      'observation: {image: {pixels: 4, pixel: 1 kpc}, bands: [{name: one, at: [1.4 GHz]}]}',
      `numerics: {tolerance: ${parts.tolerance ?? 1e-4}, bits: 64}`,
    ].join('\n'),
    'test.yaml',
  );
}

/** Monochromatic points of a spectrum. */
export function frequencies(...hz: readonly number[]): SpectralPoint[] {
  return hz.map((frequencyHz) => ({ frequencyHz, centreHz: frequencyHz }));
}

/** Follows rays of a scene in one go, with the scale found from them. */
export function follow(scene: Scene, spectrum: readonly SpectralPoint[], north: readonly number[], east: readonly number[], backEnd?: BackEnd): RayResult {
  const engine = makeRayEngine(scene, spectrum, backEnd);
  const bundle = { northKpc: Float64Array.from(north), eastKpc: Float64Array.from(east) };
  return traceRays(engine, scene, bundle, findMapScale(engine, scene, bundle));
}
