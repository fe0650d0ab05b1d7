import type { Law } from '../measure/laws/types.ts';
import { likelyDepth, makeLawFitter, type LawFit } from './law-fit.ts';
import type { FractionSpectrum } from './law-search.ts';

/** The best law of every pixel, [row * nx + column]; NaN where nothing was fitted. */
export interface LawMaps {
  /** Place of the best law (lowest BIC) in the list, from 0. */
  readonly best: Float64Array;
  /** Its chi^2 over the degrees of freedom. */
  readonly reducedChi2: Float64Array;
  /** By how much the BIC of the next best law is higher. */
  readonly lead: Float64Array;
  /** Parameters of the best law by name, and their errors; NaN where that law has no such parameter. */
  readonly values: Readonly<Record<string, Float64Array>>;
  readonly errors: Readonly<Record<string, Float64Array>>;
}

export interface LawMapWatch {
  readonly onProgress?: (done: number, total: number) => void;
  readonly pause?: () => Promise<void>;
  readonly signal?: AbortSignal;
}

/**
 * Fits laws to the spectra of pixels, all of the same channels and none blank. `spectrumOf` gives
 * them one by one; `length` is the size of the maps. Depths are sought as far as the steepest angle of
 * any of the pixels asks.
 */
export async function lawMaps(
  laws: readonly Law[],
  pixels: readonly number[],
  length: number,
  spectrumOf: (pixel: number) => FractionSpectrum,
  watch: LawMapWatch = {},
): Promise<LawMaps> {
  const blank = (): Float64Array => new Float64Array(length).fill(NaN);
  const names = [...new Set(laws.flatMap((law) => law.parameters.map(({ name }) => name)))];
  const byName = (): Record<string, Float64Array> => Object.fromEntries(names.map((name) => [name, blank()]));
  const maps = { best: blank(), reducedChi2: blank(), lead: blank(), values: byName(), errors: byName() };
  if (pixels.length === 0) return maps;
  const middle = spectrumOf(pixels[Math.floor(pixels.length / 2)]);
  const farthest = pixels.reduce((most, pixel) => Math.max(most, likelyDepth(spectrumOf(pixel))), 0);
  const fitters = laws.filter((law) => law.parameters.length < 2 * middle.lambda2M2.length).map((law) => makeLawFitter(law, middle.lambda2M2, middle.sigma, farthest, { starts: 2, signal: watch.signal }));
  for (const [done, pixel] of pixels.entries()) {
    const { q, u, sigma } = spectrumOf(pixel);
    const isNoisy = sigma.every((rms) => rms > 0);
    const fits: LawFit[] = [];
    for (const fitter of fitters) fits.push(await fitter.fit({ q, u, ...(isNoisy && { sigma }) }));
    fits.sort((a, b) => a.bic - b.bic);
    const [first, second] = fits;
    maps.best[pixel] = laws.indexOf(first.law);
    maps.reducedChi2[pixel] = first.chi2 / first.degreesOfFreedom;
    maps.lead[pixel] = second ? second.bic - first.bic : NaN;
    first.law.parameters.forEach(({ name }, k) => {
      maps.values[name][pixel] = first.values[k];
      maps.errors[name][pixel] = first.errors[k];
    });
    watch.onProgress?.(done + 1, pixels.length);
    if (done % 16 === 15) await watch.pause?.();
  }
  return maps;
}
