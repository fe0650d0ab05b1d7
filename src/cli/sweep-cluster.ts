import { existsSync, rmSync } from 'node:fs';
import { hostname } from 'node:os';
import { basename, join, resolve } from 'node:path';
import { FileWriter } from '../files/file-writer.ts';
import { journalLine, journalsIn } from '../files/journal.ts';
import { RowStore } from '../files/row-store.ts';
import { gridsBeside } from '../files/scene-files.ts';
import type { ClusterTask } from '../run/cluster.ts';
import { computeUnits, wantedUnits } from '../run/sweep-threads.ts';
import { rowCount } from '../sweep/design.ts';
import { unitAt, unitCount } from '../sweep/evaluate.ts';
import { planOf, type SweepSource } from '../sweep/source.ts';
import type { SweepPlan } from '../sweep/types.ts';
import { taskKey } from './cluster-flags.ts';
import type { SweepFolders } from './sweep-store.ts';

/** A slice of a sweep as a node is told of it. */
export interface SweepTaskInput {
  readonly kind: 'sweep';
  readonly source: SweepSource;
  readonly store: string;
  readonly maps: string;
  /** Units, the last one not included. */
  readonly from: number;
  readonly to: number;
}

/** A sweep cut into so many slices of neighbouring units; those whose rows are all there count as done. */
export function sweepTasks(plan: SweepPlan, source: SweepSource, { store, maps }: SweepFolders, count: number, has: (row: number) => boolean): ClusterTask[] {
  const units = unitCount(plan);
  const slices = Math.min(count, units);
  return Array.from({ length: slices }, (_, k): ClusterTask => {
    const [from, to] = [Math.floor((units * k) / slices), Math.floor((units * (k + 1)) / slices)];
    const input: SweepTaskInput = { kind: 'sweep', source, store: resolve(store), maps: resolve(maps), from, to };
    const key = taskKey(input);
    const complete = wantedUnits(plan, from, to, has).next().done === true;
    return { key, input, label: `scenes ${unitAt(plan, from).point} to ${unitAt(plan, to - 1).point}`, isDone: () => complete || existsSync(partPath(store, key)) };
  });
}

/**
 * Does one slice on a node: computes the rows that no earlier try of the slice has left, each written
 * to a journal at once, then puts all of them together into the slice's part. Whoever does the same
 * slice at the same time writes the same part.
 */
export async function doSweepTask({ source, store, maps, from, to }: SweepTaskInput, key: string, workers: number): Promise<void> {
  const part = partPath(store, key);
  if (existsSync(part)) return;
  const plan = planOf(source, gridsBeside);
  const count = rowCount(plan);
  const own = (): RowStore => new RowStore(store, count, journalsOf(store, key));
  const before = own();
  const name = `task-${key}-${hostname().replace(/\W/g, '')}-${process.pid}`;
  await computeUnits({ source, store, maps }, (worker) => `${name}-${worker}`, wantedUnits(plan, from, to, (row) => before.has(row)), workers, {});
  const rows = own();
  const file = new FileWriter(part);
  try {
    for (const { rows: list } of wantedUnits(plan, from, to, () => false)) for (const row of list) file.add(journalLine(row, rows.values(row)));
    file.finish();
  } finally {
    file.abandon();
    rows.close();
  }
  for (const path of journalsOf(store, key)) if (basename(path).startsWith(`${name}-`)) rmSync(path, { force: true });
}

function partPath(store: string, key: string): string {
  return join(store, `part-${key}.journal`);
}

/** Journals that tries of a task have left. */
function journalsOf(store: string, key: string): string[] {
  return journalsIn(store).filter((path) => basename(path).startsWith(`task-${key}-`));
}

/** Removes journals of tries of tasks whose part is there: the part holds their rows. */
export function clearTries(store: string): void {
  for (const path of journalsIn(store)) {
    const key = /^task-([0-9a-f]+)-/.exec(basename(path))?.[1];
    if (key !== undefined && existsSync(partPath(store, key))) rmSync(path, { force: true });
  }
}
