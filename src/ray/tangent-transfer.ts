import type { Kernel } from '../formula/javascript.ts';
import { panelNodes, panelRule } from './panel.ts';
import type { RayGeometry } from './path.ts';
import { blockSize, place, type TangentInputs, type TangentIntegrand } from './tangent-integrand.ts';
import type { Crossing } from './tangent-surfaces.ts';
import type { TangentSums } from './tangent-sums.ts';
import type { PanelWatcher } from './transfer.ts';

const n = panelNodes;
/** Distance from a surface, over the volume's radius, at which the integrand's two sides are taken. */
export const besideSurface = 1e-12;

/**
 * Derivatives of a ray's results on the panels that its values were accepted on, nearest panel
 * first. With emission ε, φ and Σ counted from the observer's end, and P = ∫ ε e^{2iλ²φ - 2λ⁴Σ} ds,
 *
 *     ∂P = ∫ (∂ε + ε (2iλ² ∂φ - 2λ⁴ ∂Σ)) e^{2iλ²φ - 2λ⁴Σ} ds + Σ_surfaces [behind - before] ds/dp,
 *
 * where ∂φ and ∂Σ are cumulative as φ and Σ are, and take up the jumps at surfaces that move along
 * the ray (Leibniz' rule). What `RayTracer` is to values: the plain form of the WebAssembly code.
 */
export class TangentTracer implements PanelWatcher {
  private readonly lanes = [0, 1, 2].map(() => new Float64Array(n));
  private readonly out: Float64Array[];
  private readonly size: number;
  private readonly count: number;
  /** φ and Σ at the nodes, values first, then per parameter. */
  private readonly phi: Float64Array[];
  private readonly sigma: Float64Array[];
  private readonly nearPhi: Float64Array;
  private readonly nearSigma: Float64Array;
  private crossings: readonly Crossing[] = [];
  private major = 0;
  private minor = 0;

  constructor(
    private readonly integrand: TangentIntegrand,
    private readonly kernel: Kernel,
    private readonly inputs: TangentInputs,
    private readonly geometry: RayGeometry,
    private readonly wavelengthM2: Float64Array,
    /** Filled in with every ray. */
    private readonly sums: TangentSums,
  ) {
    this.out = integrand.program.outputs.map(() => new Float64Array(n));
    this.size = blockSize(integrand.groups);
    this.count = integrand.parameters.length;
    const blocks = Array.from({ length: this.count + 1 });
    this.phi = blocks.map(() => new Float64Array(n));
    this.sigma = blocks.map(() => new Float64Array(n));
    this.nearPhi = new Float64Array(blocks.length);
    this.nearSigma = new Float64Array(blocks.length);
  }

  /** Takes up a ray. */
  begin(majorKpc: number, minorKpc: number): void {
    const { sums } = this;
    for (const array of [sums.total, sums.cosine, sums.sine, sums.faradayDepth]) array.fill(0);
    this.nearPhi.fill(0);
    this.nearSigma.fill(0);
    [this.major, this.minor] = [majorKpc, minorKpc];
    this.crossings = this.inputs.surfaces.crossings(majorKpc, minorKpc);
  }

  /** Adds an accepted panel [a, b], behind all before it. */
  panel(a: number, b: number): void {
    const half = 0.5 * (b - a);
    this.passSurfaces(b - besideSurface * this.geometry.radiusKpc);
    this.evaluate(n, (i) => 0.5 * (a + b) + half * panelRule.nodes[i]);
    for (let block = 0; block <= this.count; block++) {
      this.cumulate(this.block(block, place.faraday), half, this.nearPhi[block], this.phi[block]);
      this.cumulate(this.block(block, place.dispersion), half, this.nearSigma[block], this.sigma[block]);
    }
    for (let i = 0; i < n; i++) {
      const weight = half * panelRule.weights[i];
      this.addTotals(i, (p) => p + 1, () => weight);
      for (let k = 0; k < this.wavelengthM2.length; k++) this.addNode(k, i, weight);
    }
    for (let block = 0; block <= this.count; block++) {
      this.nearPhi[block] += half * weigh(this.block(block, place.faraday));
      this.nearSigma[block] += half * weigh(this.block(block, place.dispersion));
    }
  }

  /** Takes up what lies behind the last panel, and writes the depths. */
  finish(): void {
    this.passSurfaces(-Infinity);
    for (let p = 0; p < this.count; p++) this.sums.faradayDepth[p] = this.nearPhi[p + 1];
  }

  private block(block: number, index: number): Float64Array {
    return this.out[block * this.size + index];
  }

  private evaluate(count: number, s: (i: number) => number): void {
    const { sinI, cosI } = this.geometry;
    for (let i = 0; i < count; i++) {
      this.lanes[0][i] = this.major;
      this.lanes[1][i] = this.minor * cosI - s(i) * sinI;
      this.lanes[2][i] = this.minor * sinI + s(i) * cosI;
    }
    this.kernel.evaluate(count, this.inputs.parameters, this.lanes, this.out, this.inputs.tables, this.inputs.grids);
  }

  private cumulate(values: Float64Array, half: number, near: number, into: Float64Array): void {
    for (let i = 0; i < n; i++) {
      let sum = 0;
      for (let j = 0; j < n; j++) sum += panelRule.toNearEnd[i * n + j] * values[j];
      into[i] = near + half * sum;
    }
  }

  /** Adds each parameter's unpolarized emission at a node. */
  private addTotals(i: number, blockOf: (p: number) => number, weightOf: (p: number) => number): void {
    const frequencies = this.wavelengthM2.length;
    for (let p = 0; p < this.count; p++) {
      for (let k = 0; k < frequencies; k++) {
        this.sums.total[p * frequencies + k] += weightOf(p) * this.block(blockOf(p), place.emission + 3 * this.integrand.groupOf[k])[i];
      }
    }
  }

  /** Adds each parameter's polarized emission of a frequency at a node. */
  private addNode(k: number, i: number, weight: number): void {
    const { sums } = this;
    const square = this.wavelengthM2[k];
    const at = place.emission + 3 * this.integrand.groupOf[k];
    const [c, s] = this.rotation(square, this.phi[0][i], this.sigma[0][i], weight);
    const [cosine, sine] = [this.block(0, at + 1)[i], this.block(0, at + 2)[i]];
    const [real, imaginary] = [c * cosine - s * sine, s * cosine + c * sine];
    for (let p = 0; p < this.count; p++) {
      const index = p * this.wavelengthM2.length + k;
      const turn = 2 * square * this.phi[p + 1][i];
      const growth = -2 * square * square * this.sigma[p + 1][i];
      const [dCosine, dSine] = [this.block(p + 1, at + 1)[i], this.block(p + 1, at + 2)[i]];
      sums.cosine[index] += c * dCosine - s * dSine + growth * real - turn * imaginary;
      sums.sine[index] += s * dCosine + c * dSine + growth * imaginary + turn * real;
    }
  }

  private rotation(square: number, phi: number, sigma: number, weight: number): readonly [number, number] {
    const angle = 2 * square * phi;
    const size = weight * Math.exp(-2 * square * square * sigma);
    return [size * Math.cos(angle), size * Math.sin(angle)];
  }

  /** Takes up the jumps at the surfaces in front of s. */
  private passSurfaces(s: number): void {
    while (this.crossings.length > 0 && this.crossings[0].s >= s) {
      this.passSurface(this.crossings[0]);
      this.crossings = this.crossings.slice(1);
    }
  }

  private passSurface({ s, before, behind, rates }: Crossing): void {
    const { sums } = this;
    const aside = besideSurface * this.geometry.radiusKpc;
    this.evaluate(2, (i) => (i === 0 ? s + aside : s - aside));
    const sides = [before ? -1 : 0, behind ? 1 : 0];
    for (let i = 0; i < 2; i++) {
      if (sides[i] === 0) continue;
      this.addTotals(i, () => 0, (p) => sides[i] * rates[p]);
      for (let k = 0; k < this.wavelengthM2.length; k++) {
        const at = place.emission + 3 * this.integrand.groupOf[k];
        const [c, sine] = this.rotation(this.wavelengthM2[k], this.nearPhi[0], this.nearSigma[0], sides[i]);
        const [major, minor] = [this.block(0, at + 1)[i], this.block(0, at + 2)[i]];
        rates.forEach((rate, p) => {
          sums.cosine[p * this.wavelengthM2.length + k] += rate * (c * major - sine * minor);
          sums.sine[p * this.wavelengthM2.length + k] += rate * (sine * major + c * minor);
        });
      }
      rates.forEach((rate, p) => {
        this.nearPhi[p + 1] += sides[i] * rate * this.block(0, place.faraday)[i];
        this.nearSigma[p + 1] += sides[i] * rate * this.block(0, place.dispersion)[i];
      });
    }
  }
}

function weigh(values: Float64Array): number {
  return values.reduce((sum, value, i) => sum + panelRule.weights[i] * value, 0);
}
