import type { Kernel } from '../formula/javascript.ts';
import type { Scene } from '../scene/types.ts';
import { output, type IntegrandInputs } from './integrand.ts';
import { panelNodes, panelRule } from './panel.ts';
import { findBreaks, mostBreaks } from './path.ts';
import { exactSineCosine } from './scene-graph.ts';
import { rayGeometry } from './trace.ts';
import type { RayBundle } from './types.ts';

/** One panel of a ray; its nodes run towards the observer, and its arrays are used again for the next. */
export interface PanelValues {
  /** Half of its length, kpc. */
  readonly half: number;
  /** Height of each node, kpc. */
  readonly heightKpc: Float64Array;
  /** Outputs of the integrand at the nodes. */
  readonly out: readonly Float64Array[];
}

/** Panels at least in a stretch of smooth integrand, and at most. */
const leastPanels = 4;
const mostPanels = 400;

/**
 * Walks the rays of a bundle from the observer to the far end in panels fine in height, each through no
 * more Faraday depth than `depthOfPanel`, rad m^-2, as far as one look at a stretch tells.
 */
export function walkPanels(
  scene: Scene,
  { inputs, kernel, outputs }: { readonly inputs: IntegrandInputs; readonly kernel: Kernel; readonly outputs: number },
  bundle: RayBundle,
  depthOfPanel: number,
  addPanel: (panel: PanelValues) => void,
  endRay: (ray: number) => void,
): void {
  const geometry = rayGeometry(scene, inputs);
  const { sinI, cosI, heightKpc, longestPanelKpc } = geometry;
  const [sinPA, cosPA] = exactSineCosine(scene.galaxy.positionAngle);
  const breaks = new Float64Array(mostBreaks);
  const lanes = [0, 1, 2].map(() => new Float64Array(panelNodes));
  const out = Array.from({ length: outputs }, () => new Float64Array(panelNodes));
  const evaluate = (major: number, minor: number, centre: number, half: number): void => {
    for (let i = 0; i < panelNodes; i++) {
      const s = centre + half * panelRule.nodes[i];
      lanes[0][i] = major;
      lanes[1][i] = minor * cosI - s * sinI;
      lanes[2][i] = minor * sinI + s * cosI;
    }
    kernel.evaluate(panelNodes, inputs.parameters, lanes, out, inputs.tables, inputs.grids);
  };
  const panelsIn = (length: number, major: number, minor: number, centre: number): number => {
    evaluate(major, minor, centre, length / 2);
    let depth = 0;
    for (let i = 0; i < panelNodes; i++) depth += (length / 2) * panelRule.weights[i] * Math.abs(out[output.faraday][i]);
    return Math.min(mostPanels, Math.max(leastPanels, Math.ceil(length / Math.min(heightKpc / 16, longestPanelKpc)), Math.ceil(depth / depthOfPanel)));
  };
  for (let ray = 0; ray < bundle.northKpc.length; ray++) {
    const [north, east] = [bundle.northKpc[ray], bundle.eastKpc[ray]];
    const [major, minor] = [north * cosPA + east * sinPA, east * cosPA - north * sinPA];
    for (let k = findBreaks(geometry, major, minor, breaks) - 1; k > 0; k--) {
      const [far, near] = [breaks[k - 1], breaks[k]];
      const panels = panelsIn(near - far, major, minor, (far + near) / 2);
      const half = (near - far) / panels / 2;
      for (let panel = 0; panel < panels; panel++) {
        evaluate(major, minor, near - (2 * panel + 1) * half, half);
        addPanel({ half, heightKpc: lanes[2], out });
      }
    }
    endRay(ray);
  }
}
