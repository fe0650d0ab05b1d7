import { parentPort } from 'node:worker_threads';
import * as Comlink from 'comlink';
import nodeEndpoint from 'comlink/dist/esm/node-adapter.mjs';
import { buffersOf, RayService } from './ray-service.ts';

// The entry of a thread of Node: a RayService behind its port, results moved rather than copied.
if (!parentPort) throw new Error('ray-worker runs only as a worker thread');
const service = new RayService();
Comlink.expose(
  {
    begin: service.begin.bind(service),
    scale: service.scale.bind(service),
    tile: (...parameters: Parameters<RayService['tile']>) => {
      const result = service.tile(...parameters);
      return Comlink.transfer(result, buffersOf(result));
    },
  },
  nodeEndpoint(parentPort as unknown as Parameters<typeof nodeEndpoint>[0]),
);
