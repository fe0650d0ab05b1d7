import { Worker } from 'node:worker_threads';
import * as Comlink from 'comlink';
import nodeEndpoint from 'comlink/dist/esm/node-adapter.mjs';
import { ResourceError } from '../files/resource-error.ts';
import { InputError } from '../units/input-error.ts';

/** A thread of Node with a service of type T behind its port. */
export interface NodeThread<T> {
  readonly remote: Comlink.Remote<T>;
  /** A call of the service, rejected also when the thread dies. */
  orDead<Result>(call: Promise<Result>): Promise<Result>;
  close(): Promise<void>;
}

/** Starts a thread from one of the built scripts beside the program. */
export function startThread<T>(script: string): NodeThread<T> {
  const thread = new Worker(new URL(`./${script}`, import.meta.url));
  const remote = Comlink.wrap<T>(nodeEndpoint(thread as unknown as Parameters<typeof nodeEndpoint>[0]));
  let closing = false;
  const dead = new Promise<never>((_, reject) => {
    thread.once('error', (error) => reject(error));
    thread.once('exit', (code) => {
      if (!closing) reject(new Error(`a worker ended unexpectedly (exit code ${code})`));
    });
  });
  dead.catch(() => undefined);
  return {
    remote,
    orDead: (call) => Promise.race([call.catch((error: unknown) => Promise.reject(revived(error))), dead]),
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
