import { withDrawnField } from '../ray/grids.ts';
import { originPoints, tilesOf, type RayBackend, type RayJob, type Watch } from '../ray/job.ts';
import { makeRayTangents, placeTangents } from '../ray/tangent-planes.ts';
import type { MapScale } from '../ray/trace.ts';
import type { RayBundle, RayResult } from '../ray/types.ts';
import { InputError } from '../units/input-error.ts';
import { rayArrays, writeTile, type RayArray, type ServiceJob, type SharedRays, type TileNote } from './ray-service.ts';

/** One worker as the pool sees it; every call is answered or rejected, also when the worker dies. */
export interface PooledWorker {
  isDead(): boolean;
  begin(job: ServiceJob): Promise<void>;
  scale(): Promise<MapScale>;
  tile(scale: MapScale, from: number, to: number): Promise<RayResult | TileNote>;
  close(): Promise<void>;
}

/** Several workers that follow the tiles of one job at a time, in Node or in the browser. */
export interface RayPool {
  readonly backend: RayBackend;
  readonly workers: number;
  /** Ends every worker; running jobs are rejected, and so are later ones. */
  close(): Promise<void>;
}

/**
 * A pool of `count` workers. Jobs queue; tiles of a job go to whoever is free, and every tile has its
 * place in the result, so it is the same for any number of workers. The error of one worker ends the
 * job with that error; a worker that has died is replaced before the next job. `canShare`: whether
 * memory may be shared with the workers.
 */
export function makeRayPool(count: number, startWorker: () => PooledWorker, canShare: boolean): RayPool {
  const workers = Array.from({ length: count }, startWorker);
  let queue: Promise<unknown> = Promise.resolve();
  let sent: RayBundle | undefined;
  let stop: (reason: Error) => void = () => undefined;
  const closed = new Promise<never>((_, reject) => (stop = reject));
  closed.catch(() => undefined);
  const backend: RayBackend = (job, watch) => {
    const result = queue.then(async () => {
      workers.forEach((worker, k) => {
        if (worker.isDead()) workers[k] = startWorker();
      });
      const bundle = job.bundle === sent ? undefined : job.bundle;
      sent = undefined;
      const done = await runJob(workers, job, bundle, canShare, watch ?? {});
      sent = job.bundle;
      return done;
    });
    queue = result.catch(() => undefined);
    return Promise.race([result, closed]);
  };
  return {
    backend,
    workers: count,
    close: async () => {
      stop(new Error('the workers were ended while a job ran, or before it began'));
      await Promise.all(workers.map((worker) => worker.close()));
    },
  };
}

async function runJob(
  workers: readonly PooledWorker[],
  job: RayJob,
  bundle: RayBundle | undefined,
  canShare: boolean,
  { onProgress, signal }: Watch,
): Promise<RayResult> {
  signal?.throwIfAborted();
  const rays = job.bundle.northKpc.length;
  const arrays = makeArrays(job, canShare);
  const { spectrum, origins, tangents } = job;
  const scene = withDrawnField(job.scene);
  await Promise.all(workers.map((worker) => worker.begin({ scene, spectrum, origins, bundle, tangents, shared: canShare ? arrays : undefined })));
  const scale = await workers[0].scale().catch((problem: unknown) => Promise.reject(sameKind(problem)));
  const tiles = tilesOf(rays);
  const error = new Float64Array(spectrum.length);
  let [next, done, samples] = [0, 0, 0];
  let failed = false;
  const serve = async (worker: PooledWorker): Promise<void> => {
    while (next < tiles.length && !failed) {
      const [start, to] = tiles[next++];
      let from = start;
      // A tile that takes long comes in several parts, between which the job may be stopped.
      while (from < to && !failed) {
        try {
          signal?.throwIfAborted();
          const tile = await worker.tile(scale, from, to);
          if ('I' in tile) for (const name of rayArrays) if (arrays[name]) writeTile(arrays[name], tile[name], rays, from);
          if ('I' in tile && arrays.tangents && tile.tangents) placeTangents(arrays.tangents, tile.tangents, rays, from, tile.faradayDepth.length);
          for (let k = 0; k < error.length; k++) error[k] = Math.max(error[k], tile.error[k]);
          samples += tile.samples;
          const followed = 'I' in tile ? tile.faradayDepth.length : tile.rays;
          from += followed;
          done += followed;
        } catch (problem) {
          failed = true;
          throw sameKind(problem);
        }
        onProgress?.(done, rays);
      }
    }
  };
  const outcomes = await Promise.allSettled(workers.map(serve));
  for (const outcome of outcomes) if (outcome.status === 'rejected') throw outcome.reason;
  const array = (name: RayArray): Float64Array => arrays[name] ?? new Float64Array(0);
  return {
    I: array('I'),
    Q: array('Q'),
    U: array('U'),
    heightQ: array('heightQ'),
    heightU: array('heightU'),
    emittedP: array('emittedP'),
    faradayDepth: array('faradayDepth'),
    error,
    samples,
    ...(arrays.tangents && { tangents: arrays.tangents }),
  };
}

/** Threads hand errors over without their class: wrong input stays wrong input. */
function sameKind(problem: unknown): unknown {
  if (problem instanceof InputError || !(problem instanceof Error) || problem.name !== 'InputError') return problem;
  return new InputError(problem.message);
}

/** Empty arrays for the whole result of a job. */
function makeArrays(job: RayJob, canShare: boolean): SharedRays {
  const { spectrum, bundle, tangents = [] } = job;
  const rays = bundle.northKpc.length;
  const origins = originPoints(job).length;
  const planesOf = (name: RayArray): number => (name === 'faradayDepth' ? 1 : name === 'I' || name === 'Q' || name === 'U' ? spectrum.length : origins);
  const values = Object.fromEntries(
    rayArrays.map((name) => {
      const length = rays * planesOf(name);
      return [name, canShare ? new Float64Array(new SharedArrayBuffer(8 * length)) : new Float64Array(length)];
    }),
  );
  return { ...values, ...(tangents.length > 0 && { tangents: makeRayTangents(tangents.length, spectrum.length, rays, canShare) }) };
}
