import { Worker } from 'node:worker_threads';
import * as Comlink from 'comlink';
import nodeEndpoint from 'comlink/dist/esm/node-adapter.mjs';
import { ResourceError } from '../files/resource-error.ts';
import { InputError } from '../units/input-error.ts';
import type { RemoteThread } from './remote-worker.ts';

/** Starts a thread from one of the built scripts beside the program. */
export function startThread<T>(script: string): RemoteThread<T> {
  const thread = new Worker(new URL(`./${script}`, import.meta.url));
  const remote = Comlink.wrap<T>(nodeEndpoint(thread as unknown as Parameters<typeof nodeEndpoint>[0]));
  let closing = false;
  const death = new Promise<never>((_, reject) => {
    thread.once('error', (error) => reject(error));
    thread.once('exit', (code) => {
      if (!closing) reject(new Error(`a worker ended unexpectedly (exit code ${code})`));
    });
  });
  death.catch(() => undefined);
  return {
    remote,
    death,
    orDead: (call) => Promise.race([call.catch((error: unknown) => Promise.reject(revived(error))), death]),
    close: async () => {
      closing = true;
      await thread.terminate();
    },
  };
}

/** An error that crossed the border of a thread is a copy without its class; those that users see get it back. */
function revived(error: unknown): unknown {
  if (!(error instanceof Error)) return error;
  if (error.name === 'InputError') return new InputError(error.message);
  return error.name === 'ResourceError' ? new ResourceError(error.message) : error;
}
