import { existsSync } from 'node:fs';
import type { Command } from 'commander';
import { cancelJobs, hasEnded, queuedTasks } from '../run/slurm.ts';
import { InputError } from '../units/input-error.ts';
import { filesOf } from './cluster-flags.ts';
import { foldersOf } from './sweep-store.ts';

interface TasksFlags {
  readonly cancel?: boolean;
  readonly json?: boolean;
}

/** `gyrelight tasks DIR`: the tasks of a run on a cluster, shown or cancelled. */
export function addTasks(program: Command): void {
  program
    .command('tasks <dir>')
    .description('tasks that a run with --engine slurm has on the cluster')
    .option('--cancel', 'cancel those that are waiting or running; what is done is kept')
    .option('--json', 'for machines')
    .action(tasks);
}

async function tasks(dir: string, flags: TasksFlags): Promise<void> {
  const { cluster } = foldersOf(dir);
  if (!existsSync(cluster)) throw new InputError('no run in this folder has tasks on a cluster', { file: dir });
  const records = filesOf(cluster).records();
  const queue = await queuedTasks(records.map(({ name }) => name));
  const active = queue.filter((task) => !hasEnded(task));
  const count = (pick: (state: string) => boolean): number => active.filter(({ state }) => pick(state)).length;
  const waiting = count((state) => state === 'PENDING');
  if (flags.cancel) await cancelJobs([...new Set(active.map(({ jobId }) => jobId))]);
  const summary = { arrays: records.length, running: active.length - waiting, waiting, cancelled: flags.cancel ? active.length : 0, jobs: records.flatMap(({ jobId }) => jobId ?? []) };
  if (flags.json) {
    process.stdout.write(`${JSON.stringify(summary)}\n`);
    return;
  }
  const words = flags.cancel
    ? `${active.length} task${active.length === 1 ? '' : 's'} cancelled; what is done is kept, and --resume goes on`
    : `${summary.running} running, ${waiting} waiting; ${records.length} array${records.length === 1 ? '' : 's'} submitted so far: ${summary.jobs.join(', ') || 'none'}`;
  process.stdout.write(`${words}\n`);
}
