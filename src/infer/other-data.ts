import type { Ring } from '../measure/ring-profile.ts';
import type { Beam } from '../scene/types.ts';
import type { Channel } from '../sky/types.ts';
import type { SkyPoint } from '../sky/wcs.ts';
import { gaussianDeviance, riceDeviance, wrappedDeviance } from './deviance.ts';
import type { Deviance } from './deviance.ts';
import { makeLikelihood } from './likelihood.ts';
import type { Likelihood } from './likelihood.ts';
import type { DataSet } from './types.ts';

/** Data that are no Stokes maps: what else an observer has of P, chi (rad) and RM (rad m^-2). */
export interface OtherData {
  readonly quantity: 'P' | 'chi' | 'RM';
  /** Maps on the data set's grid, a profile round a ring, light of the whole galaxy (Jy), or sources behind it. */
  readonly kind: 'map' | 'sectors' | 'spectrum' | 'sources';
  readonly label: string;
  /** NaN where masked; maps and spectra channel by channel. */
  readonly values: Float64Array;
  /** One standard deviation each; of a P in maps and spectra, the rms of its Q and U. */
  readonly sigma: Float64Array;
  /** Independent values that each stands for: pixels of a map share the beam's. */
  readonly weight: number;
  /** Channels that it was seen in, or that an RM was made from; none for sources. */
  readonly channels: readonly Channel[];
  readonly beam?: Beam;
  readonly ring?: Ring;
  readonly places?: readonly SkyPoint[];
}

/** How a value is judged: Rice for P, wrapped for chi, else Gaussian; a sector's P is a mean of many and Gaussian. */
export function devianceOf({ quantity, kind }: Pick<OtherData, 'quantity' | 'kind'>): (value: number, sigma: number) => Deviance {
  if (quantity === 'chi') return wrappedDeviance;
  return quantity === 'P' && kind !== 'sectors' ? riceDeviance : gaussianDeviance;
}

/**
 * The likelihood of everything in a data set: its maps of I, Q and U (`makeLikelihood`), then its
 * other data one by one. Models give the planes' maps first and then the values of each of the
 * others. Pixels of other maps are counted by their share of a beam, which is an approximation.
 */
export function jointLikelihood(data: DataSet): Likelihood {
  const others = data.others ?? [];
  const base = data.planes.length > 0 ? makeLikelihood(data) : nothing;
  if (others.length === 0) return base;
  const seen = others.map((other) => {
    const { values, sigma } = other;
    const known = Array.from(values.keys()).filter((k) => Number.isFinite(values[k]) && sigma[k] > 0 && Number.isFinite(sigma[k]));
    const judge = devianceOf(other);
    return { other, known, judged: known.map((k) => judge(values[k], sigma[k])), root: Math.sqrt(other.weight) };
  });
  const total = (of: (part: (typeof seen)[number]) => number): number => seen.reduce((sum, part) => sum + of(part), 0);
  return {
    count: base.count + total(({ known, other }) => known.length * other.weight),
    residualCount: base.residualCount + Math.round(total(({ known, other }) => known.length * other.weight)),
    logNormalisation: base.logNormalisation + total(({ other, judged }) => judged.reduce((sum, { best }) => sum + other.weight * best, 0)),
    places: base.places,
    residuals: (model) => {
      const planes = data.planes.length;
      if (model.length !== planes + others.length) throw new Error(`The model gave ${model.length} parts for ${planes} planes and ${others.length} other data.`);
      const parts = seen.map(({ other, known, judged, root }, index) =>
        Float64Array.from(known, (k, j) => {
          const there = model[planes + index][k];
          if (!Number.isFinite(there)) throw new Error(`The model of ${other.label} is ${there} at value ${k + 1}: no likelihood can be given.`);
          return root * judged[j].residual(there);
        }),
      );
      return joined([base.residuals(model.slice(0, planes)), ...parts]);
    },
  };
}

const nothing: Likelihood = { count: 0, residualCount: 0, logNormalisation: 0, places: [], residuals: () => new Float64Array(0) };

function joined(parts: readonly Float64Array[]): Float64Array {
  const all = new Float64Array(parts.reduce((sum, part) => sum + part.length, 0));
  let at = 0;
  for (const part of parts) {
    all.set(part, at);
    at += part.length;
  }
  return all;
}
