import { availableParallelism } from 'node:os';
import type { Command } from 'commander';
import { RowStore } from '../files/row-store.ts';
import { sha256OfText } from '../files/sha256.ts';
import { computeUnits, wantedUnits } from '../run/sweep-threads.ts';
import { pointCount, rowCount } from '../sweep/design.ts';
import { unitCount } from '../sweep/evaluate.ts';
import { findCrossings } from '../sweep/crossings.ts';
import type { SweepReading } from '../sweep/reading.ts';
import { identityOf, type SweepSource } from '../sweep/source.ts';
import { tableColumns } from '../sweep/table.ts';
import type { SweepPlan } from '../sweep/types.ts';
import { addClusterFlags, clusterScript, detachedWords, isOnCluster, runOnCluster, taskCount, type ClusterFlags } from './cluster-flags.ts';
import { OutputFolder } from './output-folder.ts';
import { durationText } from './progress.ts';
import { addCommonFlags, sayWords, withCancel, type CommonFlags, type CancelContext } from './run-context.ts';
import { clearTries, sweepTasks } from './sweep-cluster.ts';
import { addSweepFigures } from './sweep-figures.ts';
import { loadSweep } from './sweep-load.ts';
import { foldersOf, takeStore, type SweepFolders } from './sweep-store.ts';
import { mergeRows } from './sweep-tables.ts';

interface SweepFlags extends CommonFlags, ClusterFlags {
  readonly resume?: boolean;
}

/** `gyrelight sweep SWEEP`: many scenes, one row of measurements each. */
export function addSweep(program: Command): void {
  addClusterFlags(addCommonFlags(program.command('sweep <sweep>').description('measure many scenes over everything that is varied: tables, curves, what matters most')))
    .option('--resume', 'go on where an interrupted run of the same sweep left off')
    .action((path: string, flags: SweepFlags) => sweep(path, flags));
}

async function sweep(path: string, flags: SweepFlags): Promise<void> {
  const { source, plan } = loadSweep(path, flags);
  const total = rowCount(plan);
  const folders = foldersOf(flags.out);
  const isCluster = isOnCluster(flags);
  if (flags.dryRun) {
    const script = isCluster ? ['', clusterScript(sweepTasks(plan, source, folders, taskCount(flags), () => false), folders.cluster, flags)] : [];
    sayWords({}, ...planWords(plan), ...script);
    return;
  }
  takeStore(folders, identityOf(plan, source.version), flags.resume ?? false);
  const started = Date.now();
  const { computed, reading } = await withCancel(flags, async (context) => {
    const before = new RowStore(folders.store, total);
    if (before.dropped > 0) sayWords(flags, `${before.dropped} torn line${before.dropped === 1 ? '' : 's'} dropped; computed anew`);
    if (isCluster) {
      await runOnCluster(sweepTasks(plan, source, folders, taskCount(flags), (row) => before.has(row)), folders.cluster, flags, context);
      clearTries(folders.store);
    } else await computeHere(plan, source, folders, before, flags, context);
    const store = new RowStore(folders.store, total);
    try {
      return { computed: total - before.present, reading: mergeRows(plan, store, folders.out, metaOf(plan, source), (done, all) => context.progress.show('merging rows', done, all, 'rows')) };
    } finally {
      store.close();
    }
  }, isCluster ? detachedWords(flags.out) : `stopped; the rows so far are kept in ${folders.store}, and --resume goes on`);
  const seconds = (Date.now() - started) / 1000;
  const folder = new OutputFolder(flags.out);
  const crossings = findCrossings(plan, reading);
  addSweepFigures(folder, plan, source, reading, crossings, folders.maps);
  const summary = summaryOf(plan, reading, crossings.map(({ sentence }) => sentence));
  folder.add('summary.json', `${JSON.stringify(summary, null, 2)}\n`);
  folder.write();
  if (flags.json) process.stdout.write(`${JSON.stringify({ ...summary, computed, seconds, files: ['sweep.csv', 'sweep.parquet', ...folder.names] }, null, 2)}\n`);
  const rate = computed > 0 ? `, ${(computed / seconds).toPrecision(2)} rows a second` : '';
  const seen = crossings.filter(({ intervals }) => intervals.length > 0).map(({ sentence }) => sentence);
  const unseen = crossings.length > seen.length ? [`${crossings.length - seen.length} of ${crossings.length} asymmetries stay below ${plan.threshold}σ or cannot be told.`] : [];
  sayWords(flags, ...seen, ...unseen, `${total} rows (${computed} computed now in ${durationText(seconds)}${rate}). Tables, figures and report: ${flags.out}/`);
}

async function computeHere(plan: SweepPlan, source: SweepSource, { store, maps }: SweepFolders, rows: RowStore, flags: SweepFlags, { progress, signal }: CancelContext): Promise<void> {
  const total = rows.count - rows.present;
  if (total === 0) return;
  const workers = Math.min(flags.workers ?? availableParallelism(), unitCount(plan));
  let done = 0;
  await computeUnits({ source, store, maps }, (worker) => `rows-${worker + 1}`, wantedUnits(plan, 0, unitCount(plan), (row) => rows.has(row)), workers, {
    signal,
    onDone: ({ rows: { length } }) => progress.show('computing scenes', (done += length), total, 'rows'),
  });
}

/** What the tables say of themselves. */
function metaOf(plan: SweepPlan, { version, text }: SweepSource): Readonly<Record<string, string | number>> {
  return { title: plan.title, program: `gyrelight ${version}`, sweepSha256: sha256OfText(text), design: plan.design, rows: rowCount(plan) };
}

function summaryOf(plan: SweepPlan, reading: SweepReading, crossings: readonly string[]): Record<string, unknown> {
  return {
    title: plan.title,
    design: plan.design,
    points: pointCount(plan),
    rows: rowCount(plan),
    scenes: plan.variants.map(({ name }) => name),
    vary: plan.axes.map(({ path }) => path),
    columns: tableColumns(plan).map(({ name }) => name),
    crossings,
    importance: reading.importance().map(({ variant, column, indices }) => ({
      scene: plan.variants[variant].name,
      measure: reading.columns[column].name,
      indices: Object.fromEntries(indices.map(({ first, firstError, total, totalError }, k) => [plan.axes[k].path, { first, firstError, total, totalError }])),
    })),
  };
}

function planWords(plan: SweepPlan): string[] {
  const points = pointCount(plan);
  const vary = plan.axes.map(({ path, values, spacing }) => `${path} (${plan.design === 'grid' || spacing === 'list' ? `${values.length} values` : `range, ${spacing}`})`);
  return [
    `${plan.title || 'sweep'}: ${plan.design} of ${points} scenes${plan.realisations > 0 ? `, ${plan.realisations} realisations each` : ''}: ${rowCount(plan)} rows`,
    `scenes  ${plan.variants.map(({ name }) => name).join('; ')}`,
    `vary  ${vary.join('; ') || 'nothing'}`,
    `columns  ${tableColumns(plan).map(({ name }) => name).join(', ')}`,
  ];
}
