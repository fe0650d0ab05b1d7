import { compileJavaScript } from '../../src/formula/javascript.ts';
import { gaussLegendre } from '../../src/math/quadrature.ts';
import { compileIntegrand, output, type SpectralPoint } from '../../src/ray/integrand.ts';
import { findBreaks } from '../../src/ray/path.ts';
import { rayGeometry } from '../../src/ray/trace.ts';
import { brightnessPerKpc, intrinsicPolarization, wavelengthSquared } from '../../src/ray/synchrotron.ts';
import type { RayResult } from '../../src/ray/types.ts';
import type { Scene } from '../../src/scene/types.ts';

/** What one ray brings by brute force, per frequency, Jy/sr; depth in rad m^-2. */
export interface DenseRay {
  readonly I: number[];
  readonly Q: number[];
  readonly U: number[];
  readonly depth: number;
}

const n = 16;
const rule = gaussLegendre(n);
/** ∫ from node i to 1 of the j-th Lagrange polynomial, by quadrature of the product form. */
const toNearEnd = rule.nodes.reduce<number[][]>((rows, x) => {
  const half = (1 - x) / 2;
  const row = Array.from({ length: n }, (_, j) =>
    rule.nodes.reduce((sum, t, k) => sum + half * rule.weights[k] * lagrange(j, x + half * (t + 1)), 0),
  );
  return [...rows, row];
}, []);

function lagrange(j: number, x: number): number {
  return rule.nodes.reduce((product, node, k) => (k === j ? product : (product * (x - node)) / (rule.nodes[j] - node)), 1);
}

/**
 * Follows rays with a fixed number of equal panels of 16 nodes between declared breaks, never
 * looking at the integrand: the slow answer that the adaptive one is held against. `panelKpc` is
 * the longest panel.
 */
export function denseRays(scene: Scene, spectrum: readonly SpectralPoint[], north: readonly number[], east: readonly number[], panelKpc: number): DenseRay[] {
  const integrand = compileIntegrand(scene, spectrum);
  const kernel = compileJavaScript(integrand.program);
  const inputs = integrand.inputs(scene);
  const geometry = rayGeometry(scene, inputs);
  const { sinI, cosI } = geometry;
  const pa = scene.galaxy.positionAngle;
  const squares = spectrum.map(({ frequencyHz }) => wavelengthSquared(frequencyHz));
  const lanes = [0, 1, 2].map(() => new Float64Array(n));
  const out = integrand.program.outputs.map(() => new Float64Array(n));
  return north.map((northKpc, ray) => {
    const major = northKpc * Math.cos(pa) + east[ray] * Math.sin(pa);
    const minor = east[ray] * Math.cos(pa) - northKpc * Math.sin(pa);
    const breaks = new Float64Array(128);
    const count = findBreaks(geometry, major, minor, breaks);
    const sums = squares.map(() => ({ I: 0, Q: 0, U: 0 }));
    let [phi, sigma, measure] = [0, 0, 0];
    for (let k = count - 1; k > 0; k--) {
      const panels = Math.ceil((breaks[k] - breaks[k - 1]) / panelKpc);
      const half = (breaks[k] - breaks[k - 1]) / panels / 2;
      for (let panel = panels - 1; panel >= 0; panel--) {
        const centre = breaks[k - 1] + (2 * panel + 1) * half;
        for (let i = 0; i < n; i++) {
          const s = centre + half * rule.nodes[i];
          lanes[0][i] = major;
          lanes[1][i] = minor * cosI - s * sinI;
          lanes[2][i] = minor * sinI + s * cosI;
        }
        kernel.evaluate(n, inputs.parameters, lanes, out, inputs.tables, inputs.grids);
        for (let i = 0; i < n; i++) {
          let [depth, variance, column] = [phi, sigma, measure];
          for (let j = 0; j < n; j++) {
            depth += half * toNearEnd[i][j] * out[output.faraday][j];
            variance += half * toNearEnd[i][j] * out[output.dispersion][j];
            column += half * toNearEnd[i][j] * out[output.emissionMeasure][j];
          }
          for (let f = 0; f < squares.length; f++) {
            const emission = half * rule.weights[i] * out[output.firstGroup + integrand.groupOf[f]][i] * Math.exp(-(inputs.freeFree?.opacity[f] ?? 0) * column);
            const thermal = (inputs.freeFree?.opacity[f] ?? 0) * half * rule.weights[i] * out[output.emissionMeasure][i] * Math.exp(-(inputs.freeFree?.opacity[f] ?? 0) * column);
            const size = emission * Math.exp(-2 * squares[f] ** 2 * variance);
            const [c, s] = [Math.cos(2 * squares[f] * depth), Math.sin(2 * squares[f] * depth)];
            sums[f].I += emission * out[output.total][i] + thermal * (inputs.freeFree?.source[f] ?? 0);
            sums[f].Q += size * (c * out[output.cosine][i] - s * out[output.sine][i]);
            sums[f].U += size * (s * out[output.cosine][i] + c * out[output.sine][i]);
          }
        }
        phi += half * out[output.faraday].reduce((sum, value, i) => sum + rule.weights[i] * value, 0);
        sigma += half * out[output.dispersion].reduce((sum, value, i) => sum + rule.weights[i] * value, 0);
        measure += half * out[output.emissionMeasure].reduce((sum, value, i) => sum + rule.weights[i] * value, 0);
      }
    }
    const factors = spectrum.map(({ frequencyHz }) => brightnessPerKpc(scene.cosmicRays.index, frequencyHz));
    const intrinsic = intrinsicPolarization(scene.cosmicRays.index);
    const [c, s] = [Math.cos(2 * pa), Math.sin(2 * pa)];
    return {
      I: sums.map(({ I }, f) => factors[f] * I),
      Q: sums.map(({ Q, U }, f) => factors[f] * intrinsic * (c * Q - s * U)),
      U: sums.map(({ Q, U }, f) => factors[f] * intrinsic * (s * Q + c * U)),
      depth: phi,
    };
  });
}

/** Errors of rays on the scale of physics.md section 3: the larger of those of I, Q and U. */
export interface Miss {
  readonly error: number;
  readonly ray: number;
  readonly frequencyHz: number;
}

/**
 * The largest difference of given rays from brute force, over all frequencies. Rays whose brute
 * force has not settled to `settled` on that scale, though its panels were halved, are left out.
 */
export function largestMiss(
  scene: Scene,
  spectrum: readonly SpectralPoint[],
  [north, east]: readonly [readonly number[], readonly number[]],
  given: Pick<RayResult, 'I' | 'Q' | 'U'>,
  { panelKpc = 0.06, settled = 1e-6 } = {},
): Miss & { readonly unsettled: number } {
  const rays = north.length;
  const coarse = denseRays(scene, spectrum, north, east, panelKpc);
  const fine = denseRays(scene, spectrum, north, east, panelKpc / 1.6);
  const ours = north.map((_, ray): DenseRay => {
    const [I, Q, U] = [given.I, given.Q, given.U].map((list) => spectrum.map((_, f) => list[f * rays + ray]));
    return { I, Q, U, depth: NaN };
  });
  const scales = spectrum.map((_, f) => {
    const I = Math.max(...fine.map((ray) => ray.I[f]));
    return { I, P: Math.max(1e-3 * I, ...fine.map((ray) => Math.hypot(ray.Q[f], ray.U[f]))) };
  });
  const difference = (a: DenseRay, b: DenseRay, f: number): number =>
    Math.max(Math.abs(a.I[f] - b.I[f]) / scales[f].I, Math.abs(a.Q[f] - b.Q[f]) / scales[f].P, Math.abs(a.U[f] - b.U[f]) / scales[f].P);
  const apart = (a: DenseRay, b: DenseRay): number => Math.max(...spectrum.map((_, f) => difference(a, b, f)));
  let [worst, unsettled]: [Miss, number] = [{ error: 0, ray: 0, frequencyHz: spectrum[0].frequencyHz }, 0];
  for (let ray = 0; ray < rays; ray++) {
    let [before, after] = [coarse[ray], fine[ray]];
    for (let panel = panelKpc / 2; apart(before, after) > settled && panel > panelKpc / 100; panel /= 2) {
      [before, after] = [after, denseRays(scene, spectrum, [north[ray]], [east[ray]], panel / 2)[0]];
    }
    if (apart(before, after) > settled) {
      unsettled++;
      continue;
    }
    spectrum.forEach(({ frequencyHz }, f) => {
      const error = difference(ours[ray], after, f);
      if (!(error <= worst.error)) worst = { error, ray, frequencyHz };
    });
  }
  return { ...worst, unsettled };
}
