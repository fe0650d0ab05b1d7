import * as Comlink from 'comlink';
import { buffersOf, RayService } from './ray-service.ts';

/** What a worker offers to its pool: a RayService whose results are moved rather than copied. */
export type RayServer = Pick<RayService, 'begin' | 'scale' | 'tile'>;

/** Serves rays at the other end of a port, in a thread of Node or a worker of the browser. */
export function serveRays(endpoint: Comlink.Endpoint): void {
  const service = new RayService();
  const server: RayServer = {
    begin: service.begin.bind(service),
    scale: service.scale.bind(service),
    tile: (...parameters) => {
      const result = service.tile(...parameters);
      return Comlink.transfer(result, buffersOf(result));
    },
  };
  Comlink.expose(server, endpoint);
}
