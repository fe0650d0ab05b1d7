import { createBrowserPool } from '../../src/run/browser-pool.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import type { RayResult } from '../../src/ray/types.ts';

// The page of ray-pool.test.ts: what the test calls, as `window.pools`.

const threads: Worker[] = [];
const makeWorker = (name: string): Worker => {
  const thread = new Worker(new URL('../../src/run/browser-worker.ts', import.meta.url), { type: 'module', name });
  threads.push(thread);
  return thread;
};

interface Job {
  readonly sceneText: string;
  readonly hertz: readonly number[];
  readonly northKpc: readonly number[];
  readonly eastKpc: readonly number[];
}

const pools = {
  isIsolated: () => crossOriginIsolated,

  /** Numbers of a result by a pool of so many workers. */
  async follow(job: Job, workers: number): Promise<Record<string, number[]>> {
    const pool = createBrowserPool(workers, makeWorker);
    try {
      return plain(await pool.backend(jobOf(job)));
    } finally {
      await pool.close();
    }
  },

  /** Starts a job, stops it after a while: the error's name, and how long it took to end, ms. */
  async cancel(job: Job, afterMs: number): Promise<{ name: string; tookMs: number }> {
    const pool = createBrowserPool(2, makeWorker);
    const controller = new AbortController();
    let stopped = 0;
    try {
      await new Promise<void>((resolve, reject) => {
        pool.backend(jobOf(job), {
          signal: controller.signal,
          onProgress: () => {
            if (stopped !== 0) return;
            stopped = Infinity;
            setTimeout(() => {
              stopped = performance.now();
              controller.abort();
            }, afterMs);
          },
        }).then(() => resolve(), reject);
      });
      return { name: 'finished', tookMs: 0 };
    } catch (error) {
      return { name: (error as Error).name, tookMs: performance.now() - stopped };
    } finally {
      await pool.close();
    }
  },

  /** Kills a worker in the midst of a job: what the job says, and what the same pool gives for the next. */
  async kill(long: Job, short: Job): Promise<{ message: string; next: Record<string, number[]> }> {
    threads.length = 0;
    const pool = createBrowserPool(2, makeWorker);
    let message = 'finished';
    let killed = false;
    try {
      await pool.backend(jobOf(long), {
        onProgress: () => {
          if (!killed) threads[1].terminate();
          killed = true;
        },
      });
    } catch (error) {
      message = (error as Error).message;
    }
    const next = plain(await pool.backend(jobOf(short)));
    await pool.close();
    return { message, next };
  },

  /** Locks that workers of a pool still hold: those that live. */
  async alive(): Promise<number> {
    const { held = [] } = await navigator.locks.query();
    return held.length;
  },
};

function jobOf({ sceneText, hertz, northKpc, eastKpc }: Job) {
  return {
    scene: parseScene(sceneText, 'test.yaml'),
    spectrum: hertz.map((frequencyHz) => ({ frequencyHz, centreHz: frequencyHz })),
    bundle: { northKpc: Float64Array.from(northKpc), eastKpc: Float64Array.from(eastKpc) },
  };
}

function plain(result: RayResult): Record<string, number[]> {
  const arrays = Object.entries(result).filter((entry): entry is [string, Float64Array] => ArrayBuffer.isView(entry[1]));
  return Object.fromEntries(arrays.map(([name, values]) => [name, Array.from(values)]));
}

export type Pools = typeof pools;

(globalThis as unknown as { pools: Pools }).pools = pools;
