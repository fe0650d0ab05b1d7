import type { RayBackend, RayJob, Watch } from '../ray/job.ts';
import type { RayBundle, RayResult } from '../ray/types.ts';
import { faintShare, mostRounds } from './brightness-levels.ts';

const arrays = ['I', 'Q', 'U', 'heightQ', 'heightU', 'emittedP'] as const;

/**
 * Follows rays so that faint ones are exact beside themselves too, and not only beside the map's
 * brightest: their heights of origin, angles and fractions are shown like any other. Rays below a
 * hundredth of the brightest are followed once more among themselves, and so on.
 */
export async function traceFaintToo(backend: RayBackend, job: RayJob, watch: Watch): Promise<RayResult> {
  const result = await backend(job, watch);
  let samples = result.samples;
  let indices: Int32Array = Int32Array.from(result.faradayDepth.keys());
  for (let round = 0; round < mostRounds; round++) {
    const faint = faintOf(result, indices);
    if (faint.length === 0) break;
    const again = await backend({ ...job, bundle: pick(job.bundle, faint) }, { signal: watch.signal });
    replace(result, again, faint);
    samples += again.samples;
    indices = faint;
  }
  return { ...result, samples };
}

/**
 * For each ray of one plane of I, the brightest of those it was followed among, over the brightest of all: what is
 * negligible beside that one need not be beside a faint ray.
 */
export function faintness({ I }: Pick<RayResult, 'I'>): Float64Array {
  const shares = new Float64Array(I.length).fill(1);
  let indices: Int32Array = Int32Array.from(I.keys());
  const brightestOf = (some: Int32Array): number => some.reduce((most, index) => Math.max(most, I[index]), 0);
  const brightest = brightestOf(indices);
  for (let round = 0; round < mostRounds; round++) {
    indices = faintOf({ I }, indices);
    const share = brightestOf(indices) / brightest;
    for (const index of indices) shares[index] = share;
  }
  return shares;
}

/** Those of `indices` whose first frequency is faint beside the brightest among them, but not dark. */
function faintOf({ I }: Pick<RayResult, 'I'>, indices: Int32Array): Int32Array {
  const brightest = indices.reduce((most, index) => Math.max(most, I[index]), 0);
  return indices.filter((index) => I[index] > 0 && I[index] < faintShare * brightest);
}

function pick({ northKpc, eastKpc }: RayBundle, indices: Int32Array): RayBundle {
  const at = (offsets: Float64Array): Float64Array => Float64Array.from(indices, (index) => offsets[index]);
  return { northKpc: at(northKpc), eastKpc: at(eastKpc) };
}

function replace(whole: RayResult, part: RayResult, indices: Int32Array): void {
  const rays = whole.faradayDepth.length;
  indices.forEach((index, k) => {
    whole.faradayDepth[index] = part.faradayDepth[k];
    for (const name of arrays) {
      const planes = part[name].length / indices.length;
      for (let plane = 0; plane < planes; plane++) whole[name][plane * rays + index] = part[name][plane * indices.length + k];
    }
  });
}
