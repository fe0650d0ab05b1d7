import { drawKey, drawTurbulence, type TurbulenceDraw, type TurbulenceGrids } from '../field/turbulence.ts';
import { cellsPerWave } from '../field/turbulence-spectrum.ts';
import { findSplit } from '../scene/resolved-turbulence.ts';
import type { GriddedFunction, Scene } from '../scene/types.ts';
import { placedComponents } from './scene-graph.ts';
import { turbulenceGridNames } from './turbulence-graph.ts';

/** Every gridded function of a scene by the name that its graph knows it by. */
export function sceneGrids(scene: Scene): ReadonlyMap<string, GriddedFunction> {
  const { field, thermalElectrons, cosmicRays } = placedComponents(scene);
  const entries = [...field, ...thermalElectrons, ...cosmicRays].flatMap(({ path, component }) =>
    Object.entries(component.grids ?? {}).map(([name, grid]) => [`${path}/${name}`, grid] as const),
  );
  return new Map([...entries, ...turbulenceEntries(scene)]);
}

function turbulenceEntries(scene: Scene): readonly (readonly [string, GriddedFunction])[] {
  const split = findSplit(scene);
  if (!split) return [];
  const { potential, electrons } = drawnGrids(scene, split.draw);
  const panelKpc = split.shortestKpc / cellsPerWave;
  const named = turbulenceGridNames.potential.map((name, k) => [name, { grid: potential[k], panelKpc }] as const);
  return electrons ? [...named, [turbulenceGridNames.electrons, { grid: electrons, panelKpc }]] : named;
}

/**
 * A scene with its random field drawn, in memory that threads share where the host has it, so that
 * workers need not draw it again. A scene changed afterwards is drawn anew where it must be.
 */
export function withDrawnField(scene: Scene): Scene {
  const split = findSplit(scene);
  return split ? { ...scene, drawn: { key: drawKey(split.draw), grids: drawnGrids(scene, split.draw) } } : scene;
}

function drawnGrids({ drawn }: Scene, draw: TurbulenceDraw): TurbulenceGrids {
  return drawn?.key === drawKey(draw) ? drawn.grids : drawOnce(draw);
}

/** Most bytes of drawn fields that are kept for their next use. */
const mostKeptBytes = 600e6;
const kept = new Map<string, TurbulenceGrids>();

function drawOnce(draw: TurbulenceDraw): TurbulenceGrids {
  const key = drawKey(draw);
  const known = kept.get(key);
  if (known) {
    kept.delete(key);
    kept.set(key, known);
    return known;
  }
  const grids = drawTurbulence(draw);
  kept.set(key, grids);
  let bytes = [...kept.values()].reduce((sum, one) => sum + bytesOf(one), 0);
  for (const [oldest, one] of kept) {
    if (bytes <= mostKeptBytes || oldest === key) break;
    kept.delete(oldest);
    bytes -= bytesOf(one);
  }
  return grids;
}

function bytesOf({ potential, electrons }: TurbulenceGrids): number {
  return [...potential, ...(electrons ? [electrons] : [])].reduce((sum, { coefficients }) => sum + coefficients.byteLength, 0);
}
