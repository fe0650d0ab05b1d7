import { availableParallelism } from 'node:os';
import { Worker } from 'node:worker_threads';
import * as Comlink from 'comlink';
import nodeEndpoint from 'comlink/dist/esm/node-adapter.mjs';
import { makeRayPool, type PooledWorker, type RayPool } from './ray-pool.ts';
import type { RayResult } from '../ray/types.ts';
import type { RayService, TileNote } from './ray-service.ts';

/** Starts a pool of threads of this machine: as many as asked for, or one per core. */
export function startNodePool(workers = availableParallelism()): RayPool {
  const script = new URL('./ray-worker.js', import.meta.url);
  return makeRayPool(Array.from({ length: workers }, () => startWorker(script)), true);
}

function startWorker(script: URL): PooledWorker {
  const thread = new Worker(script);
  const remote = Comlink.wrap<RayService>(nodeEndpoint(thread as unknown as Parameters<typeof nodeEndpoint>[0]));
  let closing = false;
  const dead = new Promise<never>((_, reject) => {
    thread.once('error', (error) => reject(error));
    thread.once('exit', (code) => {
      if (!closing) reject(new Error(`a worker ended unexpectedly (exit code ${code})`));
    });
  });
  dead.catch(() => undefined);
  const orDead = <T>(call: Promise<T>): Promise<T> => Promise.race([call, dead]);
  return {
    begin: (job) => orDead(remote.begin(job)),
    scale: () => orDead(remote.scale()),
    tile: (scale, from, to) => orDead<RayResult | TileNote>(remote.tile(scale, from, to)),
    close: async () => {
      closing = true;
      await thread.terminate();
    },
  };
}
