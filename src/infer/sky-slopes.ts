import type { RayTangents } from '../ray/types.ts';
import { lambda2M2 } from '../sky/wavelength.ts';
import type { StokesQuantity } from './types.ts';

/** I, Q and U in planes [plane * pixels + pixel]. */
export type StokesPlanes = Readonly<Record<StokesQuantity, Float64Array>>;

/** Σ rate · derivative over the parameters that rays were differentiated by, each `size` numbers long. */
export function combineTangents(tangents: RayTangents | undefined, rates: Float64Array, size: number): StokesPlanes {
  const combine = (name: 'I' | 'Q' | 'U'): Float64Array => weighted(tangents?.[name], rates, size);
  return { I: combine('I'), Q: combine('Q'), U: combine('U') };
}

/** The same for the total Faraday depths of rays. */
export function combineDepths(tangents: RayTangents | undefined, rates: Float64Array, rays: number): Float64Array {
  return weighted(tangents?.faradayDepth, rates, rays);
}

/** Throws where a rate asks for derivatives that the rays did not bring: zeros in their place would end a fit where it began. */
function weighted(all: Float64Array | undefined, rates: Float64Array, size: number): Float64Array {
  const sum = new Float64Array(size);
  rates.forEach((rate, p) => {
    if (rate === 0) return;
    if (!all) throw new Error('the rays came without the derivatives asked for');
    const part = all.subarray(p * size, (p + 1) * size);
    for (let k = 0; k < size; k++) sum[k] += rate * part[k];
  });
  return sum;
}

/** d(depth)/d(parameter) of a foreground from two of its states, rad m^-2: a number or a map. */
export function depthSlope(ahead: number | Float64Array, behind: number | Float64Array, width: number): number | Float64Array {
  const at = (depth: number | Float64Array, pixel: number): number => (typeof depth === 'number' ? depth : depth[pixel]);
  if (typeof ahead === 'number' && typeof behind === 'number') return (ahead - behind) / width;
  const size = typeof ahead === 'number' ? (behind as Float64Array).length : ahead.length;
  return Float64Array.from({ length: size }, (_, pixel) => (at(ahead, pixel) - at(behind, pixel)) / width);
}

/** Adds 2iλ² ∂(depth) (Q + iU) to derivatives of turned maps: what a change of the foreground's depth does to them. */
export function addTurning(slope: StokesPlanes, maps: StokesPlanes, frequenciesHz: readonly number[], depth: number | Float64Array): void {
  const pixels = maps.Q.length / frequenciesHz.length;
  frequenciesHz.forEach((frequency, plane) => {
    const turn = 2 * lambda2M2(frequency);
    for (let pixel = 0; pixel < pixels; pixel++) {
      const at = plane * pixels + pixel;
      const angle = turn * (typeof depth === 'number' ? depth : depth[pixel]);
      slope.Q[at] -= angle * maps.U[at];
      slope.U[at] += angle * maps.Q[at];
    }
  });
}
