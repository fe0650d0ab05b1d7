import type { Scene } from '../scene/types.ts';
import { InputError } from '../units/input-error.ts';
import { output, type SpectralPoint } from './integrand.ts';
import { walkPanels, type PanelValues } from './panel-walk.ts';
import { panelNodes, panelRule } from './panel.ts';
import { exactSineCosine } from './scene-graph.ts';
import { brightnessPerKpc, intrinsicPolarization } from './synchrotron.ts';
import { makeRayEngine } from './trace.ts';
import type { RayBundle } from './types.ts';

/** What a bin of Faraday depth holds of every ray: emission as it arises, Jy/sr, [frequency * rays + ray]. */
export interface DepthBin {
  readonly Q: Float64Array;
  readonly U: Float64Array;
}

/** Bins from the lowest to the highest that emits, side by side; the k-th is centred on `firstDepth` + k `width`, rad m^-2. */
export interface DepthBins {
  readonly firstDepth: number;
  readonly width: number;
  /** Undefined where nothing of any ray lies in it. */
  readonly bins: readonly (DepthBin | undefined)[];
}

/** Gathers the emission of rays in bins of one width. */
export interface DepthBinner {
  /** Adds some rays: `rays[k]` is where the k-th of the bundle stands in the bins, `foreground[k]` its depth before the galaxy, rad m^-2. */
  add(bundle: RayBundle, rays: readonly number[], foreground: ArrayLike<number>): void;
  done(): DepthBins;
}

/** Depth of a panel over the width of a bin, at most: pieces of panels are an eighth of that. */
const binsOfPanel = 4;
/** More bins tell nothing that fewer do not; and all of them take memory. */
const mostBins = 4096;
const mostBytes = 4e9;

/**
 * Makes bins for the true Faraday spectrum of `rays` rays (physics.md section 5): the polarized emission
 * j_P e^{2i chi0} ds by the depth between it and the observer, before rotation, depolarization by cells,
 * absorption and beam. What lies in all bins together is the emission of the whole ray. Each piece
 * of a ray is spread evenly over the depths that it spans. Bins are centred on whole multiples of `width`.
 * Throws InputError where a galaxy spans more bins than can be kept.
 * Source: Burn 1966, P(lambda^2) = integral F(phi) e^{2i phi lambda^2} dphi.
 */
export function makeDepthBinner(scene: Scene, spectrum: readonly SpectralPoint[], rays: number, width: number): DepthBinner {
  const { integrand, kernel } = makeRayEngine(scene, spectrum, 'javascript');
  const walker = { inputs: integrand.inputs(scene), kernel: kernel(), outputs: integrand.program.outputs.length };
  const [sinPA, cosPA] = exactSineCosine(scene.galaxy.positionAngle);
  const [cosTurn, sinTurn] = [cosPA * cosPA - sinPA * sinPA, 2 * sinPA * cosPA];
  const toJansky = spectrum.map(({ frequencyHz }) => brightnessPerKpc(scene.cosmicRays.index, frequencyHz) * intrinsicPolarization(scene.cosmicRays.index));
  const bins = new Map<number, DepthBin>();
  let [lowest, highest] = [Infinity, -Infinity];
  const binAt = (index: number): DepthBin => {
    const known = bins.get(index);
    if (known) return known;
    [lowest, highest] = [Math.min(lowest, index), Math.max(highest, index)];
    refuseTooMany(lowest * width, highest * width, width, 16 * rays * spectrum.length);
    const bin = { Q: new Float64Array(rays * spectrum.length), U: new Float64Array(rays * spectrum.length) };
    bins.set(index, bin);
    return bin;
  };
  const [Q, U] = [new Float64Array(spectrum.length), new Float64Array(spectrum.length)];
  const spread = (ray: number, from: number, to: number): void => {
    const [low, high] = from < to ? [from, to] : [to, from];
    const [first, last] = [Math.floor(low / width + 0.5), Math.floor(high / width + 0.5)];
    for (let index = first; index <= last; index++) {
      const share = first === last ? 1 : (Math.min(high, (index + 0.5) * width) - Math.max(low, (index - 0.5) * width)) / (high - low);
      if (!(share > 0)) continue;
      const bin = binAt(index);
      for (let f = 0; f < spectrum.length; f++) {
        bin.Q[f * rays + ray] += share * Q[f];
        bin.U[f * rays + ray] += share * U[f];
      }
    }
  };
  const add: DepthBinner['add'] = (bundle, places, foreground) => {
    let ray = 0;
    let depth = foreground[0];
    const addPanel = ({ half, out }: PanelValues): void => {
      // Pieces of a Gauss-Legendre rule as long as their weights fill the panel, and their depths its depth.
      for (let i = panelNodes - 1; i >= 0; i--) {
        const length = half * panelRule.weights[i];
        const behind = depth + length * out[output.faraday][i];
        const [major, minor] = [out[output.cosine][i], out[output.sine][i]];
        for (let f = 0; f < spectrum.length; f++) {
          const size = length * toJansky[f] * out[output.firstGroup + integrand.groupOf[f]][i];
          // From the frame of the major axis to that of north.
          Q[f] = size * (cosTurn * major - sinTurn * minor);
          U[f] = size * (sinTurn * major + cosTurn * minor);
        }
        if (Q.some((value, f) => value !== 0 || U[f] !== 0)) spread(places[ray], depth, behind);
        depth = behind;
      }
    };
    walkPanels(scene, walker, bundle, binsOfPanel * width, addPanel, (walked) => {
      ray = walked + 1;
      depth = foreground[ray];
    });
  };
  return {
    add,
    done: () => ({ firstDepth: lowest * width, width, bins: Array.from({ length: Math.max(0, highest - lowest + 1) }, (_, k) => bins.get(lowest + k)) }),
  };
}

function refuseTooMany(lowest: number, highest: number, width: number, bytesOfBin: number): void {
  const count = Math.round((highest - lowest) / width) + 1;
  const most = Math.min(mostBins, Math.max(1, Math.floor(mostBytes / bytesOfBin)));
  if (count <= most) return;
  throw new InputError(
    `depths from ${Number(lowest.toPrecision(6))} to ${Number(highest.toPrecision(6))} rad/m^2, seen so far, are ${count} bins of ${width} rad/m^2; ` +
      `at most ${most} are kept for a map of this size: take wider bins`,
  );
}
