import type { RayResult } from '../ray/types.ts';

/** Rays of about the same brightness, and what errors of theirs are measured against, per frequency. */
export interface Level {
  /** I of the first frequency from which on rays belong here. */
  readonly faintest: number;
  readonly I: Float64Array;
  /** The larger of the largest |P| and 1e-3 of the largest I. */
  readonly P: Float64Array;
  /** The largest Faraday depth, or 1 rad m^-2. */
  readonly depth: number;
}

/** Rays fainter than this share of the brightest are followed again on a scale of their own. */
export const faintShare = 1e-2;
/** Rounds of that: down to 1e-6 of the brightest. */
export const mostRounds = 3;

/**
 * The scales of rays by brightness, as `traceFaintToo` sets them: a level for those down to a
 * hundredth of the brightest, one for those down to a hundredth of that, and so on.
 */
export function brightnessLevels({ I, Q, U, faradayDepth }: Pick<RayResult, 'I' | 'Q' | 'U' | 'faradayDepth'>, frequencies: number): readonly Level[] {
  const rays = faradayDepth.length;
  const brightest = I.subarray(0, rays).reduce((most, value) => Math.max(most, value), 0);
  const depth = faradayDepth.reduce((most, value) => Math.max(most, Math.abs(value)), 1);
  return Array.from({ length: mostRounds + 1 }, (_, round) => {
    const most = brightest * faintShare ** round;
    const faintest = round === mostRounds ? -Infinity : most * faintShare;
    const own = new Float64Array(frequencies);
    const polarized = new Float64Array(frequencies);
    for (let ray = 0; ray < rays; ray++) {
      if (I[ray] < faintest || I[ray] > most) continue;
      for (let k = 0; k < frequencies; k++) {
        own[k] = Math.max(own[k], I[k * rays + ray]);
        polarized[k] = Math.max(polarized[k], Math.hypot(Q[k * rays + ray], U[k * rays + ray]));
      }
    }
    return { faintest, I: own, P: polarized.map((value, k) => Math.max(value, 1e-3 * own[k])), depth };
  });
}
