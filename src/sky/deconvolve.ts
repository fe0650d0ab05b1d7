import { spreadFunction, type DepthPlan } from './depth-spectrum.ts';

export interface DeconvolveOptions {
  /** Share of the highest peak taken in a step; default 0.1. */
  readonly gain?: number;
  /** Stop when nothing stands above this many times the noise of the spectrum; default 3. */
  readonly threshold?: number;
  /** Stop there too, in the unit of F: for spectra without stated noise; default 1e-3 of the highest peak then. */
  readonly lowest?: number;
  /** Default 1000. */
  readonly mostSteps?: number;
}

/** A deconvolved Faraday spectrum; arrays over the plan's depths. */
export interface Deconvolved {
  /** Components: what emits at each depth, at the reference wavelength. */
  readonly componentsRe: Float64Array;
  readonly componentsIm: Float64Array;
  /** Components widened to the resolution, with the residual added. */
  readonly re: Float64Array;
  readonly im: Float64Array;
  /** Largest |residual|. */
  readonly residual: number;
  readonly steps: number;
  /** Whether the residual is below the threshold, rather than the steps used up. */
  readonly converged: boolean;
}

/**
 * Makes the deconvolution of spectra of one plan: at the highest |F| a share of it is taken as a
 * component and its spread function is subtracted, until the residual is low; components are
 * widened by a Gaussian as wide as the spread function and the residual added.
 * Source: Heald et al. 2009 (from memory).
 */
export function makeDeconvolver(plan: DepthPlan, options: DeconvolveOptions = {}): (re: ArrayLike<number>, im: ArrayLike<number>) => Deconvolved {
  const { count, step, noise, resolution } = plan;
  const { gain = 0.1, threshold = 3, mostSteps = 1000 } = options;
  const [spreadRe, spreadIm] = [new Float64Array(2 * count - 1), new Float64Array(2 * count - 1)];
  for (let k = 0; k < count; k++) {
    const [re, im] = spreadFunction(plan, k * step);
    [spreadRe[count - 1 + k], spreadIm[count - 1 + k]] = [re, im];
    [spreadRe[count - 1 - k], spreadIm[count - 1 - k]] = [re, -im];
  }
  const sigma = resolution / Math.sqrt(8 * Math.LN2);
  const reach = Math.min(count - 1, Math.ceil((6 * sigma) / step));
  const narrow = Float64Array.from({ length: reach + 1 }, (_, k) => Math.exp(-((k * step) ** 2) / (2 * sigma * sigma)));
  return (spectrumRe, spectrumIm) => {
    const [re, im] = [Float64Array.from(spectrumRe), Float64Array.from(spectrumIm)];
    const [componentsRe, componentsIm] = [new Float64Array(count), new Float64Array(count)];
    let [at, height] = highest(re, im);
    const lowest = Math.max(threshold * noise, options.lowest ?? (noise > 0 ? 0 : 1e-3 * height));
    let steps = 0;
    while (height > lowest && steps < mostSteps) {
      const [x, y] = [gain * re[at], gain * im[at]];
      componentsRe[at] += x;
      componentsIm[at] += y;
      for (let k = 0, j = count - 1 - at; k < count; k++, j++) {
        re[k] -= x * spreadRe[j] - y * spreadIm[j];
        im[k] -= x * spreadIm[j] + y * spreadRe[j];
      }
      steps++;
      [at, height] = highest(re, im);
    }
    for (let k = 0; k < count; k++) {
      if (componentsRe[k] === 0 && componentsIm[k] === 0) continue;
      for (let j = Math.max(0, k - reach); j <= Math.min(count - 1, k + reach); j++) {
        re[j] += componentsRe[k] * narrow[Math.abs(j - k)];
        im[j] += componentsIm[k] * narrow[Math.abs(j - k)];
      }
    }
    return { componentsRe, componentsIm, re, im, residual: height, steps, converged: height <= lowest };
  };
}

function highest(re: Float64Array, im: Float64Array): [at: number, height: number] {
  let [at, largest] = [0, -1];
  for (let k = 0; k < re.length; k++) {
    const square = re[k] * re[k] + im[k] * im[k];
    if (square > largest) [largest, at] = [square, k];
  }
  return [at, Math.sqrt(largest)];
}
