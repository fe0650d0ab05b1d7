import { bytesText } from '../../field/grid-file.ts';
import { drawTurbulence } from '../../field/turbulence.ts';
import { findSplit } from '../../scene/resolved-turbulence.ts';
import type { Scene } from '../../scene/types.ts';
import { follow, prepare, sceneAt, squareBundle } from './prepare.ts';
import { cell, quickest } from './timing.ts';

const side = 17;

/** Scene a with a field drawn on a grid, its outer scale 1/8 of the box. */
function turbulentScene(cells: number): Scene {
  const scene = sceneAt(40, 1e-3);
  const resolved = { rmsUG: 4, outerScaleKpc: 1, slope: 11 / 3, boxKpc: 8, cells, smallestKpc: 0, verticalRatio: 1, realisation: 0, electrons: { rms: 0.5, correlation: -0.5 } };
  return { ...scene, turbulence: { resolved } };
}

/** Time and memory to draw random fields with fluctuations of n_e, and what rays through them cost. */
export function measureTurbulence(): void {
  console.log(`\nresolved turbulence with n_e: CPU to draw, memory of the grids in every worker, and rays through them at 1.4 GHz, tolerance 1e-3`);
  console.log('cells      draw s   grids     ms/ray  samples/ray  ns/sample');
  for (const cells of [64, 128, 256]) {
    const scene = turbulentScene(cells);
    const split = findSplit(scene);
    if (!split) continue;
    const { value: grids, seconds: drawing } = quickest(1, () => drawTurbulence(split.draw));
    const bytes = [...grids.potential, ...(grids.electrons ? [grids.electrons] : [])].reduce((sum, { coefficients }) => sum + coefficients.byteLength, 0);
    const prepared = prepare(scene, [1.4e9], squareBundle(side), 'wasm');
    follow(prepared);
    const { value, seconds: following } = quickest(2, () => follow(prepared));
    const { samples } = value;
    const rays = side * side;
    console.log(`${String(cells).padEnd(8)}${cell(drawing)}${bytesText(bytes).padStart(10)}${cell((1e3 * following) / rays)}${cell(samples / rays)}${cell((1e9 * following) / samples)}`);
  }
}
