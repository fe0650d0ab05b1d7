import type { Scene } from '../scene/types.ts';
import type { SpectralPoint } from './integrand.ts';
import { structureKey } from './structure-key.ts';
import { joinTangents } from './tangent-planes.ts';
import { findMapScale, makeRayEngine, traceRays, type BackEnd, type RayEngine } from './trace.ts';
import type { RayBundle, RayResult } from './types.ts';

/** A scene to be followed along a bundle of rays at a list of frequencies. */
export interface RayJob {
  readonly scene: Scene;
  readonly spectrum: readonly SpectralPoint[];
  readonly bundle: RayBundle;
  /** Indices into the spectrum whose heights of origin are wanted, planes of the result in that order; all by default. */
  readonly origins?: false | readonly number[];
  /** Paths of the numbers by which to differentiate, such as `findTangentParameter` knows; none by default. */
  readonly tangents?: readonly string[];
}

/** How a long job is watched and stopped. */
export interface Watch {
  /** Rays done and rays in all. */
  readonly onProgress?: (done: number, total: number) => void;
  readonly signal?: AbortSignal;
}

/** The points of a job's spectrum whose heights of origin are wanted. */
export function originPoints({ spectrum, origins }: Pick<RayJob, 'spectrum' | 'origins'>): readonly number[] {
  return origins === undefined ? [...spectrum.keys()] : origins === false ? [] : origins;
}

const originArrays = ['heightQ', 'heightU', 'emittedP'] as const;

/** A result with the heights of origin of these points only. */
export function keepOrigins(result: RayResult, points: readonly number[]): RayResult {
  const rays = result.faradayDepth.length;
  const kept = originArrays.map((name) => {
    const planes = new Float64Array(points.length * rays);
    points.forEach((point, k) => planes.set(result[name].subarray(point * rays, (point + 1) * rays), k * rays));
    return planes;
  });
  return { ...result, heightQ: kept[0], heightU: kept[1], emittedP: kept[2] };
}

/** Whoever follows rays: this thread, or a pool of workers. The result does not depend on which. */
export type RayBackend = (job: RayJob, watch?: Watch) => Promise<RayResult>;

/** Rays followed in one call at most: the unit of work, the same wherever it runs. */
export const tileRays = 256;

/**
 * Samples after which a call ends before its tile does, some 50 ms of work: what is to be stopped
 * stops soon; derivatives count half. A count, not a time, and rays do not know each other: results are the same.
 */
export function sampleBudget(frequencies: number, tangents = 0): number {
  return 4e6 / (8 + frequencies) / (1 + tangents / 2);
}

/** [from, to) of every tile of a bundle, in order. */
export function tilesOf(rays: number): readonly (readonly [number, number])[] {
  return Array.from({ length: Math.ceil(rays / tileRays) }, (_, k) => [k * tileRays, Math.min((k + 1) * tileRays, rays)] as const);
}

/** Keeps the engine of the last few structures of scenes, so that new numbers need no compilation. */
export class EngineCache {
  private readonly engines = new Map<string, RayEngine>();

  /** `backEnd` forces what follows rays; by default the fastest that the host has. */
  constructor(private readonly backEnd?: BackEnd) {}

  /** The engine of a scene, compiled where none of the same structure and derivatives is kept. */
  get(scene: Scene, spectrum: readonly SpectralPoint[], tangents: readonly string[] = []): RayEngine {
    const key = `${structureKey(scene, spectrum)} ${tangents.join()}`;
    let engine = this.engines.get(key);
    if (!engine) {
      engine = makeRayEngine(scene, spectrum, this.backEnd, tangents);
      if (this.engines.size >= 16) this.engines.delete([...this.engines.keys()][0]);
      this.engines.set(key, engine);
    }
    return engine;
  }
}

/** Joins the results of tiles, given in order, to that of the whole bundle. */
export function joinTiles(tiles: readonly RayResult[], frequencies: number): RayResult {
  const rays = tiles.reduce((sum, tile) => sum + tile.faradayDepth.length, 0);
  const join = (pick: (tile: RayResult) => Float64Array): Float64Array => {
    const planes = tiles.length === 0 ? 0 : pick(tiles[0]).length / tiles[0].faradayDepth.length;
    const whole = new Float64Array(planes * rays);
    let start = 0;
    for (const tile of tiles) {
      const part = pick(tile);
      const length = tile.faradayDepth.length;
      for (let plane = 0; plane < planes; plane++) whole.set(part.subarray(plane * length, (plane + 1) * length), plane * rays + start);
      start += length;
    }
    return whole;
  };
  const tangents = joinTangents(tiles);
  const error = new Float64Array(frequencies);
  for (const tile of tiles) for (let k = 0; k < frequencies; k++) error[k] = Math.max(error[k], tile.error[k]);
  return {
    I: join((tile) => tile.I),
    Q: join((tile) => tile.Q),
    U: join((tile) => tile.U),
    heightQ: join((tile) => tile.heightQ),
    heightU: join((tile) => tile.heightU),
    emittedP: join((tile) => tile.emittedP),
    faradayDepth: join((tile) => tile.faradayDepth),
    error,
    samples: tiles.reduce((sum, tile) => sum + tile.samples, 0),
    ...(tangents && { tangents }),
  };
}

/** A backend that follows all rays in this thread. */
export function localBackend(cache = new EngineCache()): RayBackend {
  return async ({ scene, spectrum, bundle, origins, tangents }, watch = {}) => {
    const points = originPoints({ spectrum, origins });
    const engine = cache.get(scene, spectrum, tangents);
    const scale = findMapScale(engine, scene, bundle);
    const rays = bundle.northKpc.length;
    const budget = sampleBudget(spectrum.length, tangents?.length);
    const tiles: RayResult[] = [];
    let [done, left] = [0, budget];
    while (done < rays) {
      watch.signal?.throwIfAborted();
      const tile = traceRays(engine, scene, bundle, scale, done, Math.min(done + tileRays, rays), budget);
      tiles.push(keepOrigins(tile, points));
      done += tile.faradayDepth.length;
      watch.onProgress?.(done, rays);
      left -= tile.samples;
      if (left > 0) continue;
      // Lets whoever holds the signal have a turn.
      await new Promise((resolve) => setTimeout(resolve));
      left = budget;
    }
    return joinTiles(tiles, spectrum.length);
  };
}

