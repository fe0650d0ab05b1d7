import type { Kernel } from '../formula/javascript.ts';
import { beating, deepestSplit, mostBehind, mostDimmed, mostHidden, mostPerPanel, mostSamples, panelLimit, testedFrequencies, valleyShare, type Accuracy } from './accuracy.ts';
import { thermalEmission } from './free-free.ts';
import { output, type Integrand, type IntegrandInputs } from './integrand.ts';
import { panelNodes, panelRule } from './panel.ts';
import { hasValley, largestOf, meanError, tailOf } from './panel-error.ts';
import { findBreaks, mostBreaks, type RayGeometry } from './path.ts';
import { clearSums, type RaySums } from './ray-sums.ts';

/** Something that looks at each ray and at the panels accepted on it, the nearest to the observer first. */
export interface PanelWatcher {
  begin(majorKpc: number, minorKpc: number): void;
  panel(from: number, to: number): void;
  finish(): void;
}

const n = panelNodes;

/**
 * Follows single rays through an integrand from the observer's end: panels of Gauss–Legendre
 * nodes, bisected where the tail of the Legendre coefficients of the rotated emission, of the
 * Faraday depth or of the unpolarized emission says so (physics.md section 3). One instance
 * follows one ray at a time and allocates nothing while it does. A ray that takes more than
 * `mostSamples` is given up: its sums mean nothing.
 */
export class RayTracer {
  private readonly x = new Float64Array(n);
  private readonly y = new Float64Array(n);
  private readonly z = new Float64Array(n);
  private readonly lanes = [this.x, this.y, this.z];
  private readonly out: Float64Array[];
  private readonly phi = new Float64Array(n);
  private readonly sigma = new Float64Array(n);
  private readonly real = new Float64Array(n);
  private readonly imaginary = new Float64Array(n);
  private readonly measure = new Float64Array(n);
  private readonly made = new Float64Array(n);
  private readonly emission = new Float64Array(n);
  private readonly pending: Float64Array;
  private readonly breaks = new Float64Array(mostBreaks);
  private readonly stack = new Float64Array(3 * (deepestSplit + 2));
  /** Frequencies whose integrands decide on bisection. */
  private readonly tested: readonly number[];
  private nearPhi = 0;
  private nearSigma = 0;
  private nearMeasure = 0;

  constructor(
    private readonly integrand: Integrand,
    private readonly kernel: Kernel,
    private readonly inputs: IntegrandInputs,
    private readonly geometry: RayGeometry,
    private readonly wavelengthM2: Float64Array,
    private readonly accuracy: Accuracy,
    private readonly watcher?: PanelWatcher,
  ) {
    this.out = integrand.program.outputs.map(() => new Float64Array(n));
    this.tested = testedFrequencies(wavelengthM2, integrand.hasDispersion || integrand.hasAbsorption);
    this.pending = new Float64Array(wavelengthM2.length);
  }

  /** Integrates the ray at offsets (major, minor) from the galaxy's centre, kpc. */
  follow(majorKpc: number, minorKpc: number, sums: RaySums): void {
    clearSums(sums);
    this.watcher?.begin(majorKpc, minorKpc);
    const count = findBreaks(this.geometry, majorKpc, minorKpc, this.breaks);
    this.nearPhi = 0;
    this.nearSigma = 0;
    this.nearMeasure = 0;
    for (let k = count - 1; k > 0; k--) {
      const [from, to] = [this.breaks[k - 1], this.breaks[k]];
      const pieces = Math.max(1, Math.ceil((to - from) / this.geometry.longestPanelKpc));
      for (let near = to, piece = pieces - 1; piece >= 0; piece--) {
        const far = from + ((to - from) * piece) / pieces;
        this.interval(far, near, majorKpc, minorKpc, sums);
        near = far;
      }
    }
    sums.faradayDepth = this.nearPhi;
    const { freeFree } = this.inputs;
    if (freeFree) for (let k = 0; k < sums.total.length; k++) sums.total[k] += thermalEmission(freeFree, k, this.nearMeasure);
    this.watcher?.finish();
  }

  /** Integrates between two breaks, nearest panel first, bisecting where needed. */
  private interval(from: number, to: number, major: number, minor: number, sums: RaySums): void {
    const { stack } = this;
    let top = 0;
    stack[0] = from;
    stack[1] = to;
    stack[2] = 0;
    while (top >= 0 && sums.samples <= mostSamples) {
      const [a, b, depth] = [stack[3 * top], stack[3 * top + 1], stack[3 * top + 2]];
      this.sample(a, b, major, minor);
      sums.samples += n;
      if (depth >= deepestSplit || this.isResolved(0.5 * (b - a), sums)) {
        this.watcher?.panel(a, b);
        this.accept(0.5 * (b - a), sums);
        top--;
        continue;
      }
      const middle = 0.5 * (a + b);
      stack[3 * top + 1] = middle;
      stack[3 * top + 2] = depth + 1;
      top++;
      stack[3 * top] = middle;
      stack[3 * top + 1] = b;
      stack[3 * top + 2] = depth + 1;
    }
  }

  /** Evaluates the integrand at the nodes of [a, b], and φ, Σ and EM from the observer to each node. */
  private sample(a: number, b: number, major: number, minor: number): void {
    const { sinI, cosI } = this.geometry;
    const { x, y, z, phi, sigma, measure, out } = this;
    const half = 0.5 * (b - a);
    const centre = 0.5 * (a + b);
    for (let i = 0; i < n; i++) {
      const s = centre + half * panelRule.nodes[i];
      x[i] = major;
      y[i] = minor * cosI - s * sinI;
      z[i] = minor * sinI + s * cosI;
    }
    this.kernel.evaluate(n, this.inputs.parameters, this.lanes, out, this.inputs.tables, this.inputs.grids);
    const faraday = out[output.faraday];
    const dispersion = out[output.dispersion];
    const gas = out[output.emissionMeasure];
    const { toNearEnd } = panelRule;
    for (let i = 0; i < n; i++) {
      let depth = 0;
      let variance = 0;
      let column = 0;
      for (let j = 0; j < n; j++) {
        depth += toNearEnd[i * n + j] * faraday[j];
        variance += toNearEnd[i * n + j] * dispersion[j];
        column += toNearEnd[i * n + j] * gas[j];
      }
      phi[i] = this.nearPhi + half * depth;
      sigma[i] = this.nearSigma + half * variance;
      measure[i] = this.nearMeasure + half * column;
    }
  }

  /** Whether the panel's estimated errors are within the share of the tolerance a panel may use. */
  private isResolved(half: number, sums: RaySums): boolean {
    const { tolerance, scaleI, scaleP } = this.accuracy;
    const limit = panelLimit(tolerance);
    const path = 2 * half;
    const depth = tailOf(this.out[output.faraday]);
    const errorPhi = path * meanError(depth, 0);
    const gas = tailOf(this.out[output.emissionMeasure]);
    const errorMeasure = path * meanError(gas, 0);
    for (const k of this.tested) {
      const total = this.emit(k);
      if (this.mayHide(k, half, mostHidden * tolerance)) return false;
      const least = hasValley(total) ? valleyShare(tolerance) : 0;
      const unpolarized = tailOf(total);
      const { opacity, through, source } = this.gasAt(k);
      // What lies behind is dimmed wrongly where the gas is; what the gas itself emits follows from its column.
      const dimmed = opacity * errorMeasure;
      const arriving = Math.min(1, mostDimmed * through);
      const dims = opacity * half * gas.tail * beating;
      const errorI = (path * (meanError(unpolarized, least) + unpolarized.tail * dims) + dimmed * (arriving * scaleI[k] + through * source)) / scaleI[k];
      if (errorI > limit) return false;
      this.rotate(k);
      const turn = 2 * this.wavelengthM2[k];
      const polarized = tailOf(this.real, this.imaginary);
      // Depth errors at the nodes beat with the emission; at the far end they turn all that lies behind.
      const coupled = polarized.tail * (turn * half * depth.tail * beating + dims);
      const behind = (turn * errorPhi + dimmed * arriving) * Math.min(scaleI[k], mostBehind * scaleP[k]);
      const errorP = (path * (meanError(polarized, least) + coupled) + behind) / scaleP[k];
      if (errorP > limit) return false;
      this.pending[k] = Math.max(errorI, errorP);
    }
    for (const k of this.tested) sums.error[k] = Math.sqrt(sums.error[k] * sums.error[k] + this.pending[k] * this.pending[k]);
    return true;
  }

  /**
   * Whether rotation, damping or absorption is so fast that more emission than a share of the scales
   * could go unnoticed between the nodes: eight samples cannot tell a fast oscillation, or a layer
   * thinner than their distance.
   */
  private mayHide(k: number, half: number, share: number): boolean {
    const square = this.wavelengthM2[k];
    const { opacity, through } = this.gasAt(k);
    const turn = 4 * square * half * largestOf(this.out[output.faraday]);
    const damping = 4 * square * square * half * largestOf(this.out[output.dispersion]);
    const absorption = 2 * half * opacity * largestOf(this.out[output.emissionMeasure]);
    if (turn + damping + absorption < mostPerPanel) return false;
    const reaching = 2 * half * largestOf(this.made) * through;
    const { scaleI, scaleP } = this.accuracy;
    if (absorption >= mostPerPanel && reaching > share * scaleI[k]) return true;
    return reaching * Math.exp(-2 * square * square * this.nearSigma) > share * scaleP[k];
  }

  /** Thermal gas at a frequency: optical depth per emission measure, the share of light that comes through to the panel's near end, its brightness. */
  private gasAt(k: number): { readonly opacity: number; readonly through: number; readonly source: number } {
    const { freeFree } = this.inputs;
    if (!freeFree) return noGas;
    const opacity = freeFree.opacity[k];
    return { opacity, through: Math.exp(-opacity * this.nearMeasure), source: freeFree.source[k] };
  }

  /** Writes the unpolarized emission of a frequency as it is made, and as it comes through the gas. */
  private emit(k: number): Float64Array {
    const { out, made, emission, measure } = this;
    const density = out[output.firstGroup + this.integrand.groupOf[k]];
    const { freeFree } = this.inputs;
    for (let i = 0; i < n; i++) {
      made[i] = density[i] * out[output.total][i];
      emission[i] = freeFree ? made[i] * Math.exp(-freeFree.opacity[k] * measure[i]) : made[i];
    }
    return emission;
  }

  /** Writes the rotated, damped, absorbed polarized emission of a frequency. */
  private rotate(k: number): void {
    const { out, phi, sigma, measure, real, imaginary } = this;
    const opacity = this.inputs.freeFree?.opacity[k] ?? 0;
    const square = this.wavelengthM2[k];
    const density = out[output.firstGroup + this.integrand.groupOf[k]];
    const [cosine, sine] = [out[output.cosine], out[output.sine]];
    const damps = this.integrand.hasDispersion || this.integrand.hasAbsorption;
    for (let i = 0; i < n; i++) {
      const angle = 2 * square * phi[i];
      const size = damps ? density[i] * Math.exp(-2 * square * square * sigma[i] - opacity * measure[i]) : density[i];
      const [c, s] = [Math.cos(angle) * size, Math.sin(angle) * size];
      real[i] = c * cosine[i] - s * sine[i];
      imaginary[i] = s * cosine[i] + c * sine[i];
    }
  }

  /** Adds the panel's share to the sums of every frequency and moves on behind it. */
  private accept(half: number, sums: RaySums): void {
    const { real, imaginary, z, out } = this;
    const { weights } = panelRule;
    const [cosine, sine] = [out[output.cosine], out[output.sine]];
    for (let k = 0; k < this.wavelengthM2.length; k++) {
      const total = this.emit(k);
      this.rotate(k);
      const density = out[output.firstGroup + this.integrand.groupOf[k]];
      let [sumI, sumQ, sumU, sumZQ, sumZU, emitted] = [0, 0, 0, 0, 0, 0];
      for (let i = 0; i < n; i++) {
        const w = weights[i];
        sumI += w * total[i];
        sumQ += w * real[i];
        sumU += w * imaginary[i];
        sumZQ += w * z[i] * real[i];
        sumZU += w * z[i] * imaginary[i];
        emitted += w * density[i] * Math.sqrt(cosine[i] * cosine[i] + sine[i] * sine[i]);
      }
      sums.total[k] += half * sumI;
      sums.cosine[k] += half * sumQ;
      sums.sine[k] += half * sumU;
      sums.heightCosine[k] += half * sumZQ;
      sums.heightSine[k] += half * sumZU;
      sums.emitted[k] += half * emitted;
    }
    let [depth, variance, column] = [0, 0, 0];
    for (let i = 0; i < n; i++) {
      depth += weights[i] * out[output.faraday][i];
      variance += weights[i] * out[output.dispersion][i];
      column += weights[i] * out[output.emissionMeasure][i];
    }
    this.nearPhi += half * depth;
    this.nearSigma += half * variance;
    this.nearMeasure += half * column;
  }
}

const noGas = { opacity: 0, through: 1, source: 0 } as const;
