import type { RayResult } from '../ray/types.ts';

/** Heights of origin (kpc) of one band: [frequency][row * nx + column], NaN where there is no origin. */
export interface OriginHeights {
  readonly band: string;
  readonly frequenciesHz: readonly number[];
  readonly heightKpc: Float64Array;
}

/** Moments of origins, planes [frequency * pixels + pixel]. */
export type OriginMoments = Pick<RayResult, 'Q' | 'U' | 'heightQ' | 'heightU' | 'emittedP'>;

/** |P| below this part of what was emitted has no height of origin (physics.md section 5). */
const smallestShare = 1e-2;

/** ∫z w ds / ∫w ds of each ray, w its net share of what is seen (physics.md section 5, own definition), kpc. */
export function originHeights({ Q, U, heightQ, heightU, emittedP }: OriginMoments): Float64Array {
  return Q.map((q, k) => {
    const u = U[k];
    const square = q * q + u * u;
    const seen = square > 0 && Math.sqrt(square) >= smallestShare * emittedP[k];
    return seen ? (heightQ[k] * q + heightU[k] * u) / square : NaN;
  });
}
