import { joinTiles, tilesOf, type RayBackend, type RayJob, type Watch } from '../ray/job.ts';
import type { MapScale } from '../ray/trace.ts';
import type { RayResult } from '../ray/types.ts';

/** One worker as the pool sees it; every call is answered or rejected, also when the worker dies. */
export interface PooledWorker {
  begin(job: RayJob): Promise<void>;
  scale(): Promise<MapScale>;
  tile(scale: MapScale, from: number, to: number): Promise<RayResult>;
  close(): Promise<void>;
}

/** Several workers that follow the tiles of one job at a time, in Node or in the browser. */
export interface RayPool {
  readonly backend: RayBackend;
  readonly workers: number;
  /** Ends every worker; running jobs are rejected. */
  close(): Promise<void>;
}

/**
 * A pool over workers made by `start`. Jobs queue; tiles of a job go to whoever is free, and
 * results are joined in tile order, so they are the same for any number of workers. The error of
 * one worker ends the job with that error.
 */
export function makeRayPool(workers: readonly PooledWorker[]): RayPool {
  let queue: Promise<unknown> = Promise.resolve();
  const backend: RayBackend = (job, watch) => {
    const result = queue.then(() => runJob(workers, job, watch ?? {}));
    queue = result.catch(() => undefined);
    return result;
  };
  return {
    backend,
    workers: workers.length,
    close: async () => {
      await Promise.all(workers.map((worker) => worker.close()));
    },
  };
}

async function runJob(workers: readonly PooledWorker[], job: RayJob, { onProgress, signal }: Watch): Promise<RayResult> {
  signal?.throwIfAborted();
  await Promise.all(workers.map((worker) => worker.begin(job)));
  const scale = await workers[0].scale();
  const rays = job.bundle.northKpc.length;
  const tiles = tilesOf(rays);
  const results: RayResult[] = new Array<RayResult>(tiles.length);
  let [next, done] = [0, 0];
  let failed = false;
  const serve = async (worker: PooledWorker): Promise<void> => {
    while (next < tiles.length && !failed) {
      signal?.throwIfAborted();
      const index = next++;
      const [from, to] = tiles[index];
      try {
        results[index] = await worker.tile(scale, from, to);
      } catch (error) {
        failed = true;
        throw error;
      }
      done += to - from;
      onProgress?.(done, rays);
    }
  };
  const outcomes = await Promise.allSettled(workers.map(serve));
  for (const outcome of outcomes) if (outcome.status === 'rejected') throw outcome.reason;
  return joinTiles(results, job.spectrum.length);
}
