import type { RayResult } from '../ray/types.ts';
import type { BandPlan } from './spectral-plan.ts';
import type { StokesCube } from './types.ts';

/** The channels of a band, [channel * pixels + pixel], as means over the frequencies followed for each, Jy/sr. */
export function bandCube(plan: Pick<BandPlan, 'channels'>, rays: Pick<RayResult, 'I' | 'Q' | 'U'>, pixels: number): Pick<StokesCube, 'I' | 'Q' | 'U'> {
  const mean = (planes: Float64Array): Float64Array => {
    const cube = new Float64Array(plan.channels.length * pixels);
    plan.channels.forEach(({ points, weights }, channel) => {
      points.forEach((point, k) => {
        for (let pixel = 0; pixel < pixels; pixel++) cube[channel * pixels + pixel] += weights[k] * planes[point * pixels + pixel];
      });
    });
    return cube;
  };
  return { I: mean(rays.I), Q: mean(rays.Q), U: mean(rays.U) };
}
