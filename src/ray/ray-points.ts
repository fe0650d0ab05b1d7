import type { Scene } from '../scene/types.ts';
import { findBreaks, mostBreaks } from './path.ts';
import { exactSineCosine } from './scene-graph.ts';

/** Middles of equal pieces of a ray, far end first, galaxy frame, kpc. */
export interface RayPoints {
  /** Along the ray towards the observer. */
  readonly sKpc: Float64Array;
  readonly x: Float64Array;
  readonly y: Float64Array;
  readonly z: Float64Array;
  readonly stepKpc: number;
}

/** A ray at an offset on the sky (kpc) cut into equal pieces; undefined where it misses the volume. */
export function rayPoints({ galaxy }: Pick<Scene, 'galaxy'>, northKpc: number, eastKpc: number, pieces: number): RayPoints | undefined {
  const [sinI, cosI] = exactSineCosine(galaxy.inclination);
  const [sinPA, cosPA] = exactSineCosine(galaxy.positionAngle);
  const [major, minor] = [northKpc * cosPA + eastKpc * sinPA, eastKpc * cosPA - northKpc * sinPA];
  const breaks = new Float64Array(mostBreaks);
  const geometry = { sinI, cosI, radiusKpc: galaxy.volume.radiusKpc, heightKpc: galaxy.volume.heightKpc, longestPanelKpc: Infinity, edges: { zKpc: [], rKpc: [] } };
  const count = findBreaks(geometry, major, minor, breaks);
  if (count < 2) return undefined;
  const [from, to] = [breaks[0], breaks[count - 1]];
  const stepKpc = (to - from) / pieces;
  const sKpc = Float64Array.from({ length: pieces }, (_, i) => from + (i + 0.5) * stepKpc);
  return { sKpc, stepKpc, x: sKpc.map(() => major), y: sKpc.map((s) => minor * cosI - s * sinI), z: sKpc.map((s) => minor * sinI + s * cosI) };
}
