import { parentPort } from 'node:worker_threads';
import * as Comlink from 'comlink';
import nodeEndpoint from 'comlink/dist/esm/node-adapter.mjs';
import { SweepService } from './sweep-service.ts';

// The entry of a thread of Node that computes points of a sweep: a SweepService behind its port.
if (!parentPort) throw new Error('sweep-worker runs only as a worker thread');
const service = new SweepService();
Comlink.expose(
  { begin: service.begin.bind(service), compute: service.compute.bind(service), finish: service.finish.bind(service) },
  nodeEndpoint(parentPort as unknown as Parameters<typeof nodeEndpoint>[0]),
);
