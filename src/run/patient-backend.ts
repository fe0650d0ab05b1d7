import { EngineCache, joinTiles, tilesOf, type RayBackend } from '../ray/job.ts';
import { findMapScale, traceRays } from '../ray/trace.ts';
import type { RayResult } from '../ray/types.ts';

/** Longest stretch of computing between two breaths, ms. */
const breathMs = 20;

/**
 * A backend that follows all rays in this thread and lets it read its messages meanwhile, so that a
 * signal is heard: for workers that do whole jobs. The same numbers as any other backend.
 */
export function patientBackend(cache = new EngineCache()): RayBackend {
  return async ({ scene, spectrum, bundle }, { signal, onProgress } = {}) => {
    const engine = cache.get(scene, spectrum);
    const scale = findMapScale(engine, scene, bundle);
    const rays = bundle.northKpc.length;
    const tiles: RayResult[] = [];
    let begun = performance.now();
    for (const [from, to] of tilesOf(rays)) {
      if (performance.now() - begun > breathMs) {
        await breathe();
        begun = performance.now();
      }
      signal?.throwIfAborted();
      tiles.push(traceRays(engine, scene, bundle, scale, from, to));
      onProgress?.(to, rays);
    }
    return joinTiles(tiles, spectrum.length);
  };
}

/** Lets waiting messages be read; unlike a timer it is not held back. */
function breathe(): Promise<void> {
  return new Promise((resolve) => {
    const { port1, port2 } = new MessageChannel();
    port1.onmessage = () => {
      port1.close();
      resolve();
    };
    port2.postMessage(undefined);
  });
}
