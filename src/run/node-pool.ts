import { availableParallelism } from 'node:os';
import { startThread } from './node-thread.ts';
import { makeRayPool, type RayPool } from './ray-pool.ts';
import { poolWorker } from './remote-worker.ts';
import type { RayServer } from './serve-rays.ts';

/** Starts a pool of threads of this machine: as many as asked for, or one per core. */
export function startNodePool(workers = availableParallelism()): RayPool {
  return makeRayPool(workers, () => poolWorker(startThread<RayServer>('ray-worker.js')), true);
}
