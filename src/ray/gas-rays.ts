import { compileJavaScript } from '../formula/javascript.ts';
import { Graph, type NodeId } from '../formula/graph.ts';
import { lowerGraph } from '../formula/lower.ts';
import { coordinateSubstitution } from '../formula/vector-calculus.ts';
import { parsec } from '../units/constants.ts';
import { InputError } from '../units/input-error.ts';
import type { Scene } from '../scene/types.ts';
import { directionOrder } from './dust.ts';
import { integrandInputs } from './integrand.ts';
import { findBreaks, mostBreaks } from './path.ts';
import { panelNodes, panelRule } from './panel.ts';
import { exactSineCosine, SceneGraph } from './scene-graph.ts';
import { rayGeometry } from './trace.ts';
import type { RayBundle } from './types.ts';

/** What rays see of the gas, one number a ray; IAU signs (north through east). */
export interface GasColumns {
  /** ∫ n ds of the gas that a Zeeman measurement weighs with, cm^-3 kpc, and ∫ n B_∥ ds, B_∥ positive towards the observer. */
  readonly weight: Float64Array;
  readonly weightedField: Float64Array;
  /** ∫ n ds of the gas with dust, cm^-3 kpc, and that column times cos 2ψ and sin 2ψ of the electric vector and cos² of the field's angle to the sky. */
  readonly column: Float64Array;
  readonly Q: Float64Array;
  readonly U: Float64Array;
}

/** Integrals along a ray, in the order of `GasColumns`. */
const sums = 5;
const mostPanels = 50_000;
const deepest = 40;
/** Panels may each be wrong by this part of the tolerance. */
const panelShare = 1 / 8;

/** cm in a kpc. */
export const kpcInCm = parsec.value * 1e5;

/**
 * Follows a bundle through the gas of a scene's `zeeman` and `dust` (physics.md section 5, end): Gauss–Legendre panels,
 * halved until two halves agree with the whole to the scene's tolerance. Where a turbulent field is not
 * resolved, directions are averaged over it exactly; its B_∥ is 0 in the mean. Throws InputError where a ray has no end.
 */
export function followGas(scene: Scene, bundle: RayBundle): GasColumns {
  const evaluate = gasEvaluator(scene);
  const geometry = rayGeometry(scene, evaluate.inputs);
  const { sinI, cosI, longestPanelKpc } = geometry;
  const [sinPA, cosPA] = exactSineCosine(scene.galaxy.positionAngle);
  const [sine, cosine] = [2 * sinPA * cosPA, cosPA * cosPA - sinPA * sinPA];
  const rays = bundle.northKpc.length;
  const [weight, weightedField, column, Q, U] = Array.from({ length: sums }, () => new Float64Array(rays));
  const breaks = new Float64Array(mostBreaks);
  const limit = scene.numerics.tolerance * panelShare;
  for (let ray = 0; ray < rays; ray++) {
    const [north, east] = [bundle.northKpc[ray], bundle.eastKpc[ray]];
    const [major, minor] = [north * cosPA + east * sinPA, east * cosPA - north * sinPA];
    const panel = (from: number, to: number): Float64Array => evaluate.panel(from, to, major, minor, sinI, cosI);
    const count = findBreaks(geometry, major, minor, breaks);
    const open: { from: number; to: number; whole: Float64Array; depth: number; calm: boolean }[] = [];
    for (let k = 1; k < count; k++) {
      const pieces = Math.max(1, Math.ceil((breaks[k] - breaks[k - 1]) / longestPanelKpc));
      const step = (breaks[k] - breaks[k - 1]) / pieces;
      for (let piece = 0; piece < pieces; piece++) {
        const [from, to] = [breaks[k - 1] + piece * step, breaks[k - 1] + (piece + 1) * step];
        open.push({ from, to, whole: panel(from, to), depth: 0, calm: true });
      }
    }
    const scale = scalesOf(open.map(({ whole }) => whole));
    const total = new Float64Array(sums);
    for (let taken = open.length, next = open.pop(); next; next = open.pop()) {
      const { from, to, whole, depth, calm } = next;
      const middle = (from + to) / 2;
      const halves = [panel(from, middle), panel(middle, to)];
      const right = whole.every((value, k) => k >= sums || Math.abs(halves[0][k] + halves[1][k] - value) <= limit * scale[k]);
      // Once panels have disagreed, two agreements in a row are wanted: a jump may hide between the nodes of one.
      if ((right && calm) || depth >= deepest) {
        for (let k = 0; k < sums; k++) total[k] += halves[0][k] + halves[1][k];
        continue;
      }
      taken += 2;
      if (taken > mostPanels) throw new InputError(`the gas along the ray at north ${north.toPrecision(6)} kpc, east ${east.toPrecision(6)} kpc is not resolved to a tolerance of ${scene.numerics.tolerance} by ${mostPanels} panels: look for a formula that oscillates within parsecs, or take a larger numerics.tolerance`);
      open.push({ from, to: middle, whole: halves[0], depth: depth + 1, calm: right }, { from: middle, to, whole: halves[1], depth: depth + 1, calm: right });
    }
    [weight[ray], weightedField[ray], column[ray]] = total;
    Q[ray] = cosine * total[3] - sine * total[4];
    U[ray] = sine * total[3] + cosine * total[4];
  }
  return { weight, weightedField, column, Q, U };
}

/** Sizes that errors are measured by: columns, and ∫ n |B| for n B_∥. */
function scalesOf(panels: readonly Float64Array[]): readonly number[] {
  const sum = (index: number): number => panels.reduce((all, panel) => all + panel[index], 0);
  const column = sum(2);
  return [sum(0), sum(sums), column, column, column];
}

interface GasEvaluator {
  readonly inputs: ReturnType<typeof integrandInputs>;
  /** The integrals over a panel in the frame of the major axis, and ∫ n |B| ds behind them. */
  readonly panel: (from: number, to: number, major: number, minor: number, sinI: number, cosI: number) => Float64Array;
}

function gasEvaluator(scene: Scene): GasEvaluator {
  const graph = new Graph();
  const parts = new SceneGraph(graph, scene);
  const field = parts.totalField();
  const density = (asked: { readonly follows?: string } | undefined): NodeId => (asked ? parts.gasDensity(asked.follows) : graph.constant(0));
  const nodes = [...field, density(scene.zeeman), density(scene.dust), parts.unresolvedRms() ?? graph.constant(0)];
  const program = lowerGraph(graph, nodes, ['x', 'y', 'z'], coordinateSubstitution(graph));
  // No output depends on a frequency.
  const inputs = integrandInputs(program, scene, []);
  const kernel = compileJavaScript(program);
  const lanes = [0, 1, 2].map(() => new Float64Array(panelNodes));
  const out = nodes.map(() => new Float64Array(panelNodes));
  const panel = (from: number, to: number, major: number, minor: number, sinI: number, cosI: number): Float64Array => {
    const half = (to - from) / 2;
    for (let i = 0; i < panelNodes; i++) {
      const s = from + half * (1 + panelRule.nodes[i]);
      lanes[0][i] = major;
      lanes[1][i] = minor * cosI - s * sinI;
      lanes[2][i] = minor * sinI + s * cosI;
    }
    kernel.evaluate(panelNodes, inputs.parameters, lanes, out, inputs.tables, inputs.grids);
    const result = new Float64Array(sums + 1);
    for (let i = 0; i < panelNodes; i++) {
      const [x, y, z, weight, dust, rms] = out.map((values) => values[i]);
      const [towards, across] = [z * cosI - y * sinI, y * cosI + z * sinI];
      const square = x * x + y * y + z * z;
      const step = half * panelRule.weights[i];
      const order = square === 0 ? 0 : rms === 0 ? 1 : directionOrder(Math.sqrt(square) / rms);
      // The electric vector stands across the field.
      const turned = square === 0 ? 0 : (-step * dust * order) / square;
      result[0] += step * weight;
      result[1] += step * weight * towards;
      result[2] += step * dust;
      result[3] += turned * (x * x - across * across);
      result[4] += turned * 2 * x * across;
      result[sums] += step * weight * Math.sqrt(square);
    }
    return result;
  };
  return { inputs, panel };
}
