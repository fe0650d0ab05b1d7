import { existsSync, rmSync } from 'node:fs';
import { join } from 'node:path';
import { readText, writeWhole } from '../files/node-io.ts';
import type { Fit } from '../infer/fit.ts';

/** What is kept of a finished fit so that an interrupted ranking can go on. */
export type KeptFit = Pick<Fit, 'values' | 'errors' | 'covariance' | 'atBound' | 'converged' | 'evaluations'> & {
  /** Values at which the scatter of drawn turbulence was estimated. */
  readonly scatterAt?: Float64Array;
};

/** A kept fit as JSON, where NaN is null. */
type StoredFit = Omit<KeptFit, 'values' | 'errors' | 'covariance' | 'scatterAt'> &
  Readonly<Record<'values' | 'errors', readonly (number | null)[]>> & Readonly<Partial<Record<'covariance' | 'scatterAt', readonly (number | null)[]>>>;

/** Finished fits of a run that is not finished, one file each, written whole or not at all. */
export class FitStore {
  private readonly folder: string;

  constructor(out: string) {
    this.folder = join(out, 'unfinished');
  }

  /** The fit kept under a key; a file that is damaged counts as none. */
  find(key: string): KeptFit | undefined {
    const path = join(this.folder, `${key}.json`);
    if (!existsSync(path)) return undefined;
    try {
      const kept = JSON.parse(readText(path)) as StoredFit;
      const numbers = (list: readonly (number | null)[]): Float64Array => Float64Array.from(list, (value) => value ?? NaN);
      const { scatterAt, ...rest } = kept;
      return { ...rest, values: numbers(kept.values), errors: numbers(kept.errors), covariance: kept.covariance && numbers(kept.covariance), ...(scatterAt && { scatterAt: numbers(scatterAt) }) };
    } catch {
      return undefined;
    }
  }

  keep(key: string, { values, errors, covariance, atBound, converged, evaluations }: Fit, scatterAt?: Float64Array): void {
    const plain = { values: [...values], errors: [...errors], ...(covariance && { covariance: [...covariance] }), ...(scatterAt && { scatterAt: [...scatterAt] }), atBound, converged, evaluations };
    writeWhole(join(this.folder, `${key}.json`), JSON.stringify(plain));
  }

  /** Removes what was kept, once the run is finished. */
  clear(): void {
    rmSync(this.folder, { recursive: true, force: true });
  }
}
