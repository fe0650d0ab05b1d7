import type { Scene } from '../scene/types.ts';
import { output, type SpectralPoint } from './integrand.ts';
import { walkPanels, type PanelValues } from './panel-walk.ts';
import { panelNodes, panelRule } from './panel.ts';
import { wavelengthSquared } from './synchrotron.ts';
import { makeRayEngine } from './trace.ts';
import type { RayBundle } from './types.ts';

/** Where along one ray the light comes from: `count` pieces from the observer to the far end. */
export interface OriginPieces {
  readonly count: number;
  /** Height of each piece, kpc; positive along the spin. */
  readonly z: Float64Array;
  /** Faraday depth between each piece and the observer, and through the whole galaxy, rad m^-2; no foreground. */
  readonly depth: Float64Array;
  readonly wholeDepth: number;
  /** Net share of each piece at each frequency, w ds, [frequency][piece]; may be negative. Its sum is |P|, its unit free. */
  readonly shares: readonly Float64Array[];
  /** What each frequency's pieces would give if all were in phase and undamped: integral of |j_P| ds in that unit. */
  readonly emitted: Float64Array;
}

/** Turn of the angle 2 chi in a panel at most, rad. */
const turnOfPanel = 0.7;

/**
 * Walks the rays of a bundle and hands the net share of every piece of each to `take`: with chi the
 * final angle, w(s) = Re[j_P e^{2i(chi0 + lambda^2 phi - chi)} e^{-2 lambda^4 Sigma - tau}] (physics.md section
 * 5, own definition). The pieces are used again for the next ray. A foreground turns all alike and is
 * left out; no beam.
 */
export function walkOrigins(scene: Scene, bundle: RayBundle, spectrum: readonly SpectralPoint[], take: (ray: number, pieces: OriginPieces) => void): void {
  const { integrand, kernel } = makeRayEngine(scene, spectrum, 'javascript');
  const squares = spectrum.map(({ frequencyHz }) => wavelengthSquared(frequencyHz));
  let z = new Float64Array(4096);
  let depths = new Float64Array(4096);
  let cosine = spectrum.map(() => new Float64Array(4096));
  let sine = spectrum.map(() => new Float64Array(4096));
  const emitted = new Float64Array(spectrum.length);
  let count = 0;
  let [depth, variance, column] = [0, 0, 0];
  const inputs = integrand.inputs(scene);
  const addPanel = ({ half, heightKpc, out }: PanelValues): void => {
    if (count + panelNodes > z.length) {
      z = grown(z);
      depths = grown(depths);
      cosine = cosine.map(grown);
      sine = sine.map(grown);
    }
    let [wholeDepth, wholeVariance, wholeColumn] = [0, 0, 0];
    for (let i = 0; i < panelNodes; i++) {
      let [phi, sigma, measure] = [depth, variance, column];
      for (let j = 0; j < panelNodes; j++) {
        phi += half * panelRule.toNearEnd[i * panelNodes + j] * out[output.faraday][j];
        sigma += half * panelRule.toNearEnd[i * panelNodes + j] * out[output.dispersion][j];
        measure += half * panelRule.toNearEnd[i * panelNodes + j] * out[output.emissionMeasure][j];
      }
      wholeDepth += half * panelRule.weights[i] * out[output.faraday][i];
      wholeVariance += half * panelRule.weights[i] * out[output.dispersion][i];
      wholeColumn += half * panelRule.weights[i] * out[output.emissionMeasure][i];
      // Nodes run towards the observer, pieces away.
      const at = count + panelNodes - 1 - i;
      z[at] = heightKpc[i];
      depths[at] = phi;
      const [q, u] = [out[output.cosine][i], out[output.sine][i]];
      for (let f = 0; f < squares.length; f++) {
        const size = half * panelRule.weights[i] * out[output.firstGroup + integrand.groupOf[f]][i];
        emitted[f] += size * Math.hypot(q, u);
        const damped = size * Math.exp(-2 * squares[f] * squares[f] * sigma - (inputs.freeFree?.opacity[f] ?? 0) * measure);
        const angle = 2 * squares[f] * phi;
        const [c, s] = [damped * Math.cos(angle), damped * Math.sin(angle)];
        cosine[f][at] = c * q - s * u;
        sine[f][at] = s * q + c * u;
      }
    }
    count += panelNodes;
    depth += wholeDepth;
    variance += wholeVariance;
    column += wholeColumn;
  };
  const endRay = (ray: number): void => {
    take(ray, { count, z, depth: depths, wholeDepth: depth, shares: netShares(cosine, sine, count), emitted });
    count = 0;
    [depth, variance, column] = [0, 0, 0];
    emitted.fill(0);
  };
  walkPanels(scene, { inputs, kernel: kernel(), outputs: integrand.program.outputs.length }, bundle, turnOfPanel / (2 * Math.max(...squares)), addPanel, endRay);
}

/** The part of every piece along the final angle; written over the cosines. */
function netShares(cosine: readonly Float64Array[], sine: readonly Float64Array[], count: number): readonly Float64Array[] {
  cosine.forEach((q, f) => {
    let [sumQ, sumU] = [0, 0];
    for (let k = 0; k < count; k++) {
      sumQ += q[k];
      sumU += sine[f][k];
    }
    const P = Math.hypot(sumQ, sumU);
    const [x, y] = P > 0 ? [sumQ / P, sumU / P] : [1, 0];
    for (let k = 0; k < count; k++) q[k] = q[k] * x + sine[f][k] * y;
  });
  return cosine;
}

function grown(values: Float64Array): Float64Array<ArrayBuffer> {
  const larger = new Float64Array(2 * values.length);
  larger.set(values);
  return larger;
}
