import { availableParallelism } from 'node:os';
import { startThread } from './node-thread.ts';
import { makeRayPool, type PooledWorker, type RayPool } from './ray-pool.ts';
import type { RayResult } from '../ray/types.ts';
import type { RayService, TileNote } from './ray-service.ts';

/** Starts a pool of threads of this machine: as many as asked for, or one per core. */
export function startNodePool(workers = availableParallelism()): RayPool {
  return makeRayPool(Array.from({ length: workers }, startWorker), true);
}

function startWorker(): PooledWorker {
  const { remote, orDead, close } = startThread<RayService>('ray-worker.js');
  return {
    begin: (job) => orDead(remote.begin(job)),
    scale: () => orDead(remote.scale()),
    tile: (scale, from, to) => orDead<RayResult | TileNote>(remote.tile(scale, from, to)),
    close,
  };
}
