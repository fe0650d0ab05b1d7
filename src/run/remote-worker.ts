import type * as Comlink from 'comlink';
import type { RayResult } from '../ray/types.ts';
import type { PooledWorker } from './ray-pool.ts';
import type { TileNote } from './ray-service.ts';
import type { RayServer } from './serve-rays.ts';

/** A thread of Node or a worker of the browser, with a service of type T behind its port. */
export interface RemoteThread<T> {
  readonly remote: Comlink.Remote<T>;
  /** Rejected with words when the thread dies; never settled otherwise. */
  readonly death: Promise<never>;
  /** A call of the service, rejected also when the thread dies. */
  orDead<Result>(call: Promise<Result>): Promise<Result>;
  close(): Promise<void>;
}

/** Such a thread as a pool wants it: every call is answered or rejected. */
export function poolWorker({ remote, death, orDead, close }: RemoteThread<RayServer>): PooledWorker {
  let isDead = false;
  death.catch(() => (isDead = true));
  return {
    isDead: () => isDead,
    begin: (job) => orDead(remote.begin(job)),
    scale: () => orDead(remote.scale()),
    tile: (scale, from, to) => orDead<RayResult | TileNote>(remote.tile(scale, from, to)),
    close,
  };
}
