import { EngineCache, keepOrigins, originPoints, sampleBudget, type RayJob } from '../ray/job.ts';
import { placeTangents } from '../ray/tangent-planes.ts';
import { findMapScale, traceRays, type MapScale } from '../ray/trace.ts';
import type { RayBundle, RayResult, RayTangents } from '../ray/types.ts';

/** A job as a worker is told of it; what it has already (the same rays again) is not sent twice. */
export interface ServiceJob extends Omit<RayJob, 'bundle'> {
  readonly bundle: RayBundle | undefined;
  /** Arrays of the whole result in shared memory, where the host has it; tiles are written there. */
  readonly shared: SharedRays | undefined;
}

/** The arrays of a result that a job wants, over all its rays. */
export type SharedRays = Readonly<Partial<Record<RayArray, Float64Array>>> & { readonly tangents?: RayTangents };

/** Names of a result's arrays; all but the depth have one plane per frequency or per origin. */
export type RayArray = 'I' | 'Q' | 'U' | 'heightQ' | 'heightU' | 'emittedP' | 'faradayDepth';

export const rayArrays: readonly RayArray[] = ['I', 'Q', 'U', 'heightQ', 'heightU', 'emittedP', 'faradayDepth'];

/** What a tile says of itself where its arrays are in shared memory. */
export interface TileNote extends Pick<RayResult, 'error' | 'samples'> {
  /** Rays that are done: fewer than were asked for where they took too long. */
  readonly rays: number;
}

/**
 * What a worker does for a pool: keeps the job it is on, finds its scale, follows tiles of it. The
 * same object serves a thread of Node and a worker of the browser.
 */
export class RayService {
  private readonly cache = new EngineCache();
  private job: RayJob | undefined;
  private shared: SharedRays | undefined;

  /** Takes up a job in place of the last. */
  begin({ scene, spectrum, origins, bundle, tangents, shared }: ServiceJob): void {
    const rays = bundle ?? this.job?.bundle;
    if (!rays) throw new Error('a job came without rays');
    this.job = { scene, spectrum, origins, tangents, bundle: rays };
    this.shared = shared;
  }

  /** The scale that the job's tolerance is relative to. */
  scale(): MapScale {
    const { scene, spectrum, bundle, tangents } = this.current();
    return findMapScale(this.cache.get(scene, spectrum, tangents), scene, bundle);
  }

  /** Follows the rays `from` ≤ index < `to`, or as many of them as the budget allows: into shared memory, or as a result of its own. */
  tile(scale: MapScale, from: number, to: number): RayResult | TileNote {
    const { scene, spectrum, bundle, origins, tangents } = this.current();
    const all = traceRays(this.cache.get(scene, spectrum, tangents), scene, bundle, scale, from, to, sampleBudget(spectrum.length, tangents?.length));
    const result = keepOrigins(all, originPoints({ spectrum, origins }));
    if (!this.shared) return result;
    const rays = bundle.northKpc.length;
    for (const name of rayArrays) {
      const whole = this.shared[name];
      if (whole) writeTile(whole, result[name], rays, from);
    }
    if (this.shared.tangents && result.tangents) placeTangents(this.shared.tangents, result.tangents, rays, from, result.faradayDepth.length);
    return { error: result.error, samples: result.samples, rays: result.faradayDepth.length };
  }

  private current(): RayJob {
    if (!this.job) throw new Error('a tile was asked for before its job');
    return this.job;
  }
}

/** Copies planes [frequency][ray of the tile] to their place among all rays. */
export function writeTile(whole: Float64Array, tile: Float64Array, rays: number, from: number): void {
  const planes = whole.length / rays;
  const count = tile.length / planes;
  for (let plane = 0; plane < planes; plane++) whole.set(tile.subarray(plane * count, (plane + 1) * count), plane * rays + from);
}

/** The large arrays of a tile's result, to be moved rather than copied between threads. */
export function buffersOf(result: RayResult | TileNote): ArrayBuffer[] {
  if (!('I' in result)) return [];
  const arrays = rayArrays.map((name) => result[name]);
  if (result.tangents) arrays.push(...Object.values(result.tangents));
  return arrays.map(({ buffer }) => buffer as ArrayBuffer);
}
