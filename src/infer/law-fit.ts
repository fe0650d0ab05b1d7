import type { Law } from '../measure/laws/types.ts';
import { depthSearch, fitRotationMeasure } from '../sky/rotation-measure.ts';
import { InputError } from '../units/input-error.ts';
import { largestFraction, makeLawSearch, startingValues, type FractionSpectrum, type LawSearch } from './law-search.ts';
import { leastSquares, type LeastSquaresResult } from './least-squares.ts';

/** A law fitted to the Q and U of a spectrum. */
export interface LawFit {
  readonly law: Law;
  /** In the order of the law's parameters; angles in [0, pi). */
  readonly values: Float64Array;
  /** NaN where a bound holds a parameter, or the data do not determine it. */
  readonly errors: Float64Array;
  /** Sum of squared residuals over sigma; plain where no noise was stated. */
  readonly chi2: number;
  readonly degreesOfFreedom: number;
  /** Akaike 1974: chi^2 + 2 k, and n ln(chi^2/n) + 2 (k + 1) without noise. */
  readonly aic: number;
  /** Schwarz 1978: k ln n in place of 2 k; n counts Q and U of every channel. */
  readonly bic: number;
  readonly converged: boolean;
}

export interface LawFitOptions {
  /** Depths are sought up to this, rad m^-2; default from the slope of the angle. */
  readonly largestDepth?: number;
  /** Points of the lattice from which fits are started; default 4, and 8 for laws of more than four parameters. */
  readonly starts?: number;
  readonly signal?: AbortSignal;
}

/** No fraction is found above this many times the largest of the data: beyond, sources only cancel each other. */
const mostOverData = 20;

/** One law, ready to be fitted to many spectra of the same channels. */
export interface LawFitter {
  readonly law: Law;
  /** `sigma` in place of the fitter's own, which then only guides where fits start. */
  fit(spectrum: Pick<FractionSpectrum, 'q' | 'u'> & { readonly sigma?: Float64Array }): Promise<LawFit>;
}

/**
 * Makes the fit of a law to spectra of the same wavelengths and noise. `sigma` is the rms of q and of
 * u; all zero: none is stated, errors come from the scatter about the fit. Throws InputError where the
 * channels are fewer than the law's parameters need.
 */
export function makeLawFitter(law: Law, lambda2M2: Float64Array, sigma: Float64Array, largestDepth: number, options: LawFitOptions = {}): LawFitter {
  const count = 2 * lambda2M2.length;
  const parameters = law.parameters.length;
  if (count < parameters) throw new InputError(`${lambda2M2.length} channels cannot tell the ${parameters} parameters of ${law.name}`);
  const isNoisy = sigma.every((value) => value > 0);
  const scale = isNoisy ? sigma : sigma.map(() => 1);
  const search: LawSearch = makeLawSearch(law, lambda2M2, scale, largestDepth);
  const lower = Float64Array.from(law.parameters, ({ min }) => min);
  const sizes = Float64Array.from(law.parameters, ({ role }) => (role === 'rotation' || role === 'width' ? 0.1 / Math.max(...lambda2M2) : role === 'fraction' ? 1e-3 : 0.1));
  return {
    law,
    fit: async ({ q, u, sigma: own = scale }) => {
      const residuals = async (values: Float64Array): Promise<Float64Array> => lawResiduals(law, lambda2M2, q, u, own, values);
      const most = mostOverData * largestFraction(q, u);
      const upper = Float64Array.from(law.parameters, ({ role, max }) => (role === 'fraction' ? most : max));
      let best: LeastSquaresResult | undefined;
      for (const start of startingValues(search, { q, u }, options.starts ?? (parameters > 4 ? 8 : 4))) {
        const inside = start.map((value, k) => Math.min(Math.max(value, lower[k]), upper[k]));
        const found = await leastSquares(residuals, inside, { lower, upper, sizes, tolerance: 1e-4, maxIterations: parameters > 4 ? 40 : 20, signal: options.signal });
        if (!best || found.chi2 < best.chi2) best = found;
      }
      if (!best) throw new Error(`${law.name} has no starting point`);
      best = await leastSquares(residuals, best.values, { lower, upper, sizes, central: true, tolerance: 1e-9, signal: options.signal });
      return reported(law, best, count, isNoisy);
    },
  };
}

/** Fits several laws to one spectrum; the best (lowest BIC) comes first. Laws with more parameters than data are left out. */
export async function fitLaws(laws: readonly Law[], spectrum: FractionSpectrum, options: LawFitOptions = {}): Promise<LawFit[]> {
  const known = knownChannels(spectrum);
  const largestDepth = options.largestDepth ?? likelyDepth(known);
  const fits: LawFit[] = [];
  for (const law of laws) {
    // A fit needs one more datum than parameters to say anything about itself.
    if (2 * known.lambda2M2.length <= law.parameters.length) continue;
    fits.push(await makeLawFitter(law, known.lambda2M2, known.sigma, largestDepth, options).fit({ q: known.q, u: known.u }));
  }
  return fits.sort((a, b) => a.bic - b.bic);
}

/** The channels of a spectrum that are not blank. */
export function knownChannels({ lambda2M2, q, u, sigma }: FractionSpectrum): FractionSpectrum {
  const known = Array.from(q.keys()).filter((k) => Number.isFinite(q[k]) && Number.isFinite(u[k]));
  const pick = (values: Float64Array): Float64Array => Float64Array.from(known, (k) => values[k]);
  return { lambda2M2: pick(lambda2M2), q: pick(q), u: pick(u), sigma: pick(sigma) };
}

/** How far depths are to be sought: twice the slope of the angle (a slab shows half its depth), and four turns over the band. */
export function likelyDepth({ lambda2M2, q, u, sigma }: FractionSpectrum): number {
  const line = fitRotationMeasure(depthSearch(lambda2M2), q, u, sigma);
  return 2 * Math.abs(line?.rm ?? 0) + (4 * Math.PI) / (Math.max(...lambda2M2) - Math.min(...lambda2M2));
}

function lawResiduals(law: Law, lambda2M2: Float64Array, q: Float64Array, u: Float64Array, sigma: Float64Array, values: Float64Array): Float64Array {
  const count = lambda2M2.length;
  const residuals = new Float64Array(2 * count);
  for (let k = 0; k < count; k++) {
    const { re, im } = law.value(lambda2M2[k], values);
    residuals[k] = (re - q[k]) / sigma[k];
    residuals[count + k] = (im - u[k]) / sigma[k];
  }
  return residuals;
}

function reported(law: Law, found: LeastSquaresResult, count: number, isNoisy: boolean): LawFit {
  const parameters = law.parameters.length;
  const degreesOfFreedom = count - parameters;
  const order = law.order?.(found.values) ?? law.parameters.map((_, k) => k);
  const scatter = isNoisy ? 1 : Math.sqrt(found.chi2 / degreesOfFreedom);
  const values = Float64Array.from(order, (k) => found.values[k]);
  law.parameters.forEach(({ role }, k) => {
    if (role === 'angle') values[k] -= Math.PI * Math.floor(values[k] / Math.PI);
  });
  const misfit = isNoisy ? found.chi2 : count * Math.log(Math.max(found.chi2, Number.MIN_VALUE) / count);
  const free = isNoisy ? parameters : parameters + 1;
  return {
    law,
    values,
    errors: Float64Array.from(order, (k) => scatter * found.errors[k]),
    chi2: found.chi2,
    degreesOfFreedom,
    aic: misfit + 2 * free,
    bic: misfit + free * Math.log(count),
    converged: found.converged,
  };
}
