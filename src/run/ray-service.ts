import { EngineCache, type RayJob } from '../ray/job.ts';
import { findMapScale, traceRays, type MapScale } from '../ray/trace.ts';
import type { RayResult } from '../ray/types.ts';

/**
 * What a worker does for a pool: keeps the job it is on, finds its scale, follows tiles of it. The
 * same object serves a thread of Node and a worker of the browser.
 */
export class RayService {
  private readonly cache = new EngineCache();
  private job: RayJob | undefined;

  /** Takes up a job in place of the last. */
  begin(job: RayJob): void {
    this.job = job;
  }

  /** The scale that the job's tolerance is relative to. */
  scale(): MapScale {
    const { scene, spectrum, bundle } = this.current();
    return findMapScale(this.cache.get(scene, spectrum), scene, bundle);
  }

  /** Follows the rays `from` ≤ index < `to`. */
  tile(scale: MapScale, from: number, to: number): RayResult {
    const { scene, spectrum, bundle } = this.current();
    return traceRays(this.cache.get(scene, spectrum), scene, bundle, scale, from, to);
  }

  private current(): RayJob {
    if (!this.job) throw new Error('a tile was asked for before its job');
    return this.job;
  }
}

/** The large arrays of a tile's result, to be moved rather than copied between threads. */
export function buffersOf(result: RayResult): ArrayBuffer[] {
  const { I, Q, U, heightQ, heightU, emittedP, faradayDepth } = result;
  return [I, Q, U, heightQ, heightU, emittedP, faradayDepth].map((array) => array.buffer as ArrayBuffer);
}

