import { parentPort } from 'node:worker_threads';
import nodeEndpoint from 'comlink/dist/esm/node-adapter.mjs';
import { serveRays } from './serve-rays.ts';

// The entry of a thread of Node.
if (!parentPort) throw new Error('ray-worker runs only as a worker thread');
serveRays(nodeEndpoint(parentPort as unknown as Parameters<typeof nodeEndpoint>[0]));
