import { findMapScale, makeRayEngine, traceRays, type BackEnd, type MapScale, type RayEngine } from '../../ray/trace.ts';
import type { RayBundle, RayResult } from '../../ray/types.ts';
import { parseScene } from '../../scene/parse-scene.ts';
import type { Scene } from '../../scene/types.ts';
import sceneText from '../../../test/reference/a-spiral-quadrupole.yaml?raw';

/** The accuracy of all comparisons. */
export const tolerance = 1e-4;
/** Side of the square that is looked at: the whole galaxy. */
export const sideKpc = 30;

/** A square of rays around the centre. */
export function squareBundle(rows: number): RayBundle {
  const offset = (k: number): number => (k - (rows - 1) / 2) * (sideKpc / rows);
  return {
    northKpc: Float64Array.from({ length: rows * rows }, (_, k) => offset(Math.floor(k / rows))),
    eastKpc: Float64Array.from({ length: rows * rows }, (_, k) => -offset(k % rows)),
  };
}

/** Scene a of the reference data at an inclination. */
export function sceneAt(inclinationDeg: number, wanted = tolerance): Scene {
  const scene = parseScene(sceneText, 'a-spiral-quadrupole.yaml');
  return { ...scene, galaxy: { ...scene.galaxy, inclination: (inclinationDeg * Math.PI) / 180 }, numerics: { ...scene.numerics, tolerance: wanted } };
}

/** So many channels, Hz; three are 1.4, 2.3 and 4.8 GHz, more fill a band from 1.3 to 1.7 GHz. */
export function channels(count: number): number[] {
  if (count === 1) return [1.4e9];
  if (count === 3) return [1.4e9, 2.3e9, 4.8e9];
  return Array.from({ length: count }, (_, k) => 1.3e9 + ((k + 0.5) * 0.4e9) / count);
}

/** A scene ready to be followed. */
export interface Prepared {
  readonly engine: RayEngine;
  readonly scene: Scene;
  readonly scale: MapScale;
  readonly bundle: RayBundle;
}

export function prepare(scene: Scene, frequencyHz: readonly number[], bundle: RayBundle, backEnd: BackEnd): Prepared {
  const engine = makeRayEngine(scene, frequencyHz.map((hz) => ({ frequencyHz: hz, centreHz: hz })), backEnd);
  return { engine, scene, bundle, scale: findMapScale(engine, scene, bundle) };
}

export const follow = ({ engine, scene, bundle, scale }: Prepared): RayResult => traceRays(engine, scene, bundle, scale);
