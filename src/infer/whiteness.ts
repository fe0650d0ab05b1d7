import type { ResidualPlace } from './likelihood.ts';

/** How alike neighbouring residuals are: 0 within the error where a model leaves noise alone. */
export interface Whiteness {
  /** Mean product of neighbours over the mean square. */
  readonly correlation: number;
  /** One standard deviation for white residuals. */
  readonly error: number;
  /** Neighbours compared. */
  readonly pairs: number;
}

/**
 * The correlation of whitened residuals with their next neighbours along both axes of the lattice
 * (about a beam apart; next pixels where pixels are independent), over all planes of `which` (default:
 * all): Moran's (1950) statistic about a mean of 0. A true model leaves Gaussian white residuals, for
 * which products of neighbours are uncorrelated, so that its error is 1/sqrt(pairs). NaN where no
 * residual has a neighbour or all are 0.
 */
export function whiteness(residuals: Float64Array, places: readonly ResidualPlace[], which?: ReadonlySet<number>): Whiteness {
  const index = new Map<string, number>();
  const key = (plane: number, slow: number, fast: number): string => `${plane} ${slow} ${fast}`;
  places.forEach(({ plane, slow, fast }, k) => index.set(key(plane, slow, fast), k));
  let [products, pairs, squares, count] = [0, 0, 0, 0];
  places.forEach(({ plane, slow, fast }, k) => {
    if (which && !which.has(plane)) return;
    squares += residuals[k] ** 2;
    count++;
    for (const next of [index.get(key(plane, slow + 1, fast)), index.get(key(plane, slow, fast + 1))]) {
      if (next === undefined) continue;
      products += residuals[k] * residuals[next];
      pairs++;
    }
  });
  return { correlation: products / pairs / (squares / count), error: 1 / Math.sqrt(pairs), pairs };
}

/** Beyond this many standard deviations residuals hold structure. */
const structureSigma = 3;

/** What whiteness says of a fit, a sentence; empty where residuals are white. */
export function structureSentence(name: string, { correlation, error }: Whiteness): string {
  const sigma = correlation / error;
  if (!(Math.abs(sigma) > structureSigma)) return '';
  const number = `${correlation.toFixed(2)} ± ${error.toFixed(2)}`;
  return sigma > 0
    ? `The residuals of "${name}" are not white: neighbours correlate by ${number}. They hold structure that the model does not make.`
    : `The residuals of "${name}" are not white: neighbours are opposed (${number}). The correlation of the noise is stated too long.`;
}
