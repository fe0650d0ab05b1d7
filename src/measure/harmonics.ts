import { Matrix, SingularValueDecomposition } from 'ml-matrix';
import { InputError } from '../units/input-error.ts';

/** a cos m(phi - phase): amplitude a >= 0, phase in [0, 2 pi/m), rad. */
export interface Harmonic {
  readonly order: number;
  readonly amplitude: number;
  readonly amplitudeError: number;
  readonly phase: number;
  /** At most pi/(m sqrt 3), the spread of a phase of which nothing is known. */
  readonly phaseError: number;
}

/** a_0 + sum a_m cos m(phi - phi_m), fitted to values over azimuth. */
export interface HarmonicFit {
  readonly mean: number;
  readonly meanError: number;
  readonly harmonics: readonly Harmonic[];
  /** Sum of squared residuals over errors; NaN without errors. */
  readonly chi2: number;
  readonly degreesOfFreedom: number;
}

/**
 * Weighted least-squares fit of harmonics up to `highest` to values over azimuth (rad). Blank values
 * are left out. With errors the weights are 1/error^2; without (undefined or all zero) they are equal,
 * and the errors of the fit come from the scatter of the residuals. Errors to first order.
 * Throws InputError where the azimuths cannot tell the harmonics apart, or errors are zero in part.
 */
export function fitHarmonics(
  azimuth: ArrayLike<number>,
  values: ArrayLike<number>,
  errors?: ArrayLike<number>,
  highest = 3,
): HarmonicFit {
  const used = Array.from({ length: values.length }, (_, k) => k).filter((k) => Number.isFinite(values[k]));
  const noisy = errors !== undefined && used.some((k) => errors[k] > 0);
  if (noisy && !used.every((k) => errors[k] > 0)) {
    throw new InputError('some values over azimuth have an error of zero and others not; give all an error or none');
  }
  const terms = 2 * highest + 1;
  const scale = used.map((k) => (noisy ? 1 / errors[k] : 1));
  const design = used.map((k, row) =>
    Array.from({ length: terms }, (_, term) => scale[row] * basis(term, azimuth[k])),
  );
  const refusal = `${used.length} values over azimuth cannot tell ${terms} terms of harmonics up to order ${highest} apart`;
  if (used.length < terms) throw new InputError(`${refusal}; take more sectors or a lower order`);
  const svd = new SingularValueDecomposition(design);
  if (svd.diagonal[terms - 1] < 1e-9 * svd.diagonal[0]) {
    throw new InputError(`${refusal}, the way they lie; take more sectors or a lower order`);
  }
  const target = used.map((k, row) => scale[row] * values[k]);
  const coefficients = svd.solve(Matrix.columnVector(target)).to1DArray();

  const squares = design.reduce((sum, line, row) => {
    const model = line.reduce((total, entry, term) => total + entry * coefficients[term], 0);
    return sum + (target[row] - model) ** 2;
  }, 0);
  const degreesOfFreedom = used.length - terms;
  const variance = noisy ? 1 : degreesOfFreedom > 0 ? squares / degreesOfFreedom : NaN;
  const right = svd.rightSingularVectors;
  const covariance = (i: number, j: number): number =>
    svd.diagonal.reduce((sum, s, k) => sum + (variance * right.get(i, k) * right.get(j, k)) / s ** 2, 0);
  return {
    mean: coefficients[0],
    meanError: Math.sqrt(covariance(0, 0)),
    harmonics: Array.from({ length: highest }, (_, k) => harmonicOf(k + 1, coefficients, covariance)),
    chi2: noisy ? squares : NaN,
    degreesOfFreedom,
  };
}

/** Term 0 is 1, then cos m phi and sin m phi by turns. */
function basis(term: number, azimuth: number): number {
  const order = Math.ceil(term / 2);
  return term % 2 === 1 ? Math.cos(order * azimuth) : term === 0 ? 1 : Math.sin(order * azimuth);
}

function harmonicOf(
  order: number,
  coefficients: readonly number[],
  covariance: (i: number, j: number) => number,
): Harmonic {
  const [i, j] = [2 * order - 1, 2 * order];
  const [c, s] = [coefficients[i], coefficients[j]];
  const amplitude = Math.hypot(c, s);
  // Unit vector along (c, s); any direction does where the amplitude is zero.
  const [x, y] = amplitude > 0 ? [c / amplitude, s / amplitude] : [1, 0];
  const along = x * x * covariance(i, i) + 2 * x * y * covariance(i, j) + y * y * covariance(j, j);
  const across = y * y * covariance(i, i) - 2 * x * y * covariance(i, j) + x * x * covariance(j, j);
  const turn = (2 * Math.PI) / order;
  const phaseError = amplitude > 0 ? Math.sqrt(Math.max(across, 0)) / (order * amplitude) : Infinity;
  return {
    order,
    amplitude,
    amplitudeError: Math.sqrt(Math.max(along, 0)),
    phase: ((Math.atan2(s, c) / order) % turn + turn) % turn,
    phaseError: Math.min(phaseError, Math.PI / (order * Math.sqrt(3))),
  };
}
