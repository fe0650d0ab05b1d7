import * as Comlink from 'comlink';
import { makeRayPool, type RayPool } from './ray-pool.ts';
import { poolWorker, type RemoteThread } from './remote-worker.ts';
import type { RayServer } from './serve-rays.ts';

/**
 * Starts a pool of workers of the browser; `makeWorker` starts one of `browser-worker.ts` with the
 * name it is given, such as `new Worker(new URL('…/run/browser-worker.ts', import.meta.url),
 * { type: 'module', name })`. Results are written to shared memory where the page may share it
 * (`crossOriginIsolated`), and moved where not. A worker that dies ends its job with words, and
 * another takes its place for the next one.
 */
export function createBrowserPool(workers: number, makeWorker: (name: string) => Worker): RayPool {
  return makeRayPool(workers, () => poolWorker(startWorker(makeWorker)), globalThis.crossOriginIsolated === true);
}

let started = 0;
/** A worker says so when it has started; its script may have to come from far. */
const longestStartMs = 60_000;

function startWorker(makeWorker: (name: string) => Worker): RemoteThread<RayServer> {
  const name = `gyrelight-rays-${++started}-${crypto.randomUUID()}`;
  const worker = makeWorker(name);
  let closing = false;
  const death = new Promise<never>((_, reject) => {
    const die = (words: string): void => {
      if (closing) return;
      worker.terminate();
      reject(new Error(words));
    };
    worker.addEventListener('error', (event) => die(`a worker failed: ${event.message || 'its script could not be run'}`));
    worker.addEventListener('messageerror', () => die('a worker sent what cannot be read'));
    const late = setTimeout(() => die(`a worker did not start within ${longestStartMs / 1000} s`), longestStartMs);
    const listen = ({ data }: MessageEvent): void => {
      if (data !== 'ready') return;
      clearTimeout(late);
      worker.removeEventListener('message', listen);
      // The worker holds its lock by now, and lets go of it when it dies.
      if (navigator.locks) void navigator.locks.request(name, () => die('a worker ended unexpectedly'));
    };
    worker.addEventListener('message', listen);
  });
  death.catch(() => undefined);
  return {
    remote: Comlink.wrap<RayServer>(worker),
    death,
    orDead: (call) => Promise.race([call, death]),
    close: () => {
      closing = true;
      worker.terminate();
      return Promise.resolve();
    },
  };
}
