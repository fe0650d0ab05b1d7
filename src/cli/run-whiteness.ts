import type { Likelihood } from '../infer/likelihood.ts';
import type { DataSet } from '../infer/types.ts';
import { whiteness, type Whiteness } from '../infer/whiteness.ts';
import type { FittedRun } from './hypothesis-run.ts';

/** Whiteness of the residuals of all maps and of those of each band. */
export interface RunWhiteness {
  readonly all: Whiteness;
  readonly bands: readonly { readonly name: string; readonly whiteness: Whiteness }[];
}

/** Whiteness of a fit's residuals; undefined where there are no maps. */
export function whitenessOf({ fit }: Pick<FittedRun, 'fit'>, data: DataSet, { places }: Likelihood): RunWhiteness | undefined {
  if (places.length === 0) return undefined;
  const of = (band?: number): Whiteness =>
    whiteness(fit.residuals, places, band === undefined ? undefined : new Set(data.planes.flatMap((plane, k) => (plane.band === band ? [k] : []))));
  return { all: of(), bands: data.bands.map(({ name }, band) => ({ name, whiteness: of(band) })) };
}

/** Whiteness for JSON. */
export function whitenessRecord(found: RunWhiteness | undefined): Record<string, unknown> {
  if (!found) return {};
  const plain = ({ correlation, error, pairs }: Whiteness): Record<string, number> => ({ correlation, error, pairs });
  return { neighbourCorrelation: { ...plain(found.all), bands: Object.fromEntries(found.bands.map(({ name, whiteness: own }) => [name, plain(own)])) } };
}
