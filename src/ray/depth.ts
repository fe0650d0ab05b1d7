import type { Scene } from '../scene/types.ts';
import { output } from './integrand.ts';
import { findBreaks } from './path.ts';
import { panelNodes, panelRule } from './panel.ts';
import { exactSineCosine } from './scene-graph.ts';
import { makeRayEngine, pickRays, rayGeometry } from './trace.ts';
import type { RayBundle } from './types.ts';

/** Panels between two breaks: enough to bound a depth, which decides only how finely bands are cut. */
const panelsPerInterval = 4;

/**
 * An upper estimate of the Faraday depth (rad m^-2) anywhere along a bundle's rays: ∫|dφ/ds| ds, so
 * that fields of either sign cannot cancel, over an even choice of rays. The largest of them, or a
 * smaller quantile where a few rays through a singular centre should not decide.
 */
export function findLargestDepth(scene: Scene, bundle: RayBundle, quantile = 1): number {
  const { integrand, kernel } = makeRayEngine(scene, [{ frequencyHz: 1e9, centreHz: 1e9 }]);
  const inputs = integrand.inputs(scene);
  const geometry = rayGeometry(scene, inputs);
  const [sinPA, cosPA] = exactSineCosine(scene.galaxy.positionAngle);
  const breaks = new Float64Array(128);
  const lanes = [0, 1, 2].map(() => new Float64Array(panelNodes));
  const out = integrand.program.outputs.map(() => new Float64Array(panelNodes));
  const depths: number[] = [];
  for (const index of pickRays(bundle.northKpc.length)) {
    const [north, east] = [bundle.northKpc[index], bundle.eastKpc[index]];
    const [major, minor] = [north * cosPA + east * sinPA, east * cosPA - north * sinPA];
    const count = findBreaks(geometry, major, minor, breaks);
    let depth = 0;
    for (let k = 1; k < count; k++) {
      const panels = Math.max(panelsPerInterval, Math.ceil((breaks[k] - breaks[k - 1]) / geometry.longestPanelKpc));
      const half = (breaks[k] - breaks[k - 1]) / panels / 2;
      for (let panel = 0; panel < panels; panel++) {
        const centre = breaks[k - 1] + (2 * panel + 1) * half;
        for (let i = 0; i < panelNodes; i++) {
          const s = centre + half * panelRule.nodes[i];
          lanes[0][i] = major;
          lanes[1][i] = minor * geometry.cosI - s * geometry.sinI;
          lanes[2][i] = minor * geometry.sinI + s * geometry.cosI;
        }
        kernel().evaluate(panelNodes, inputs.parameters, lanes, out, inputs.tables, inputs.grids);
        for (let i = 0; i < panelNodes; i++) depth += half * panelRule.weights[i] * Math.abs(out[output.faraday][i]);
      }
    }
    depths.push(depth);
  }
  depths.sort((a, b) => a - b);
  return depths[Math.max(0, Math.ceil(quantile * depths.length) - 1)] ?? 0;
}
