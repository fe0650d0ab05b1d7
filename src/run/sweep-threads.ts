import { unitAt } from '../sweep/evaluate.ts';
import type { SweepPlan } from '../sweep/types.ts';
import { startThread } from './node-thread.ts';
import { serveItems } from './serve.ts';
import type { SweepJob, SweepService } from './sweep-service.ts';

/** A unit of a sweep with those of its rows that are still wanted. */
export interface WantedUnit {
  readonly unit: number;
  readonly rows: readonly number[];
}

/** The units from `from` to before `to` that have rows which are not there yet. */
export function* wantedUnits(plan: SweepPlan, from: number, to: number, has: (row: number) => boolean): Generator<WantedUnit> {
  const realisations = Math.max(1, plan.realisations);
  for (let unit = from; unit < to; unit++) {
    const { point, from: first, to: end } = unitAt(plan, unit);
    const rows: number[] = [];
    for (let k = first; k < end; k++) if (!has(point * realisations + k)) rows.push(point * realisations + k);
    if (rows.length > 0) yield { unit, rows };
  }
}

/** Computes units of a sweep in threads of this machine; every row is in a journal when this returns. */
export async function computeUnits(
  job: Omit<SweepJob, 'name'>,
  name: (worker: number) => string,
  units: Iterable<WantedUnit>,
  workers: number,
  watch: { readonly onDone?: (done: WantedUnit) => void; readonly signal?: AbortSignal },
): Promise<void> {
  const threads = Array.from({ length: workers }, () => startThread<SweepService>('sweep-worker.js'));
  const stopped = new Promise<never>((_, reject) => {
    watch.signal?.addEventListener('abort', () => reject(watch.signal?.reason as Error), { once: true });
  });
  stopped.catch(() => undefined);
  try {
    await Promise.all(threads.map(({ remote, orDead }, k) => orDead(remote.begin({ ...job, name: name(k) }))));
    const servants = threads.map(({ remote, orDead }) => ({ work: ({ unit, rows }: WantedUnit) => orDead(remote.compute(unit, rows)) }));
    await Promise.race([serveItems(servants, units, watch), stopped]);
    await Promise.all(threads.map(({ remote, orDead }) => orDead(remote.finish())));
  } finally {
    await Promise.all(threads.map((thread) => thread.close()));
  }
}
