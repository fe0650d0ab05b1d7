import { resolve } from 'node:path';
import type { Command } from 'commander';
import { sha256OfText } from '../files/sha256.ts';
import { ArrayFiles, arrayScript, type Program } from '../run/array-files.ts';
import { describeSubmission, runTasks, type ClusterTask } from '../run/cluster.ts';
import { splitFlags } from '../run/slurm.ts';
import { InputError } from '../units/input-error.ts';
import type { CancelContext, CommonFlags } from './run-context.ts';

/** The flags of commands that a cluster serves. */
export interface ClusterFlags {
  readonly tasks?: string;
  readonly slurm?: string;
  readonly retries?: string;
  readonly poll?: string;
  readonly dryRun?: boolean;
}

/** Adds the flags that say how a cluster is used. */
export function addClusterFlags(command: Command): Command {
  return command
    .option('--tasks <n>', 'with --engine slurm: tasks that the work is cut into (default 16)')
    .option('--slurm <flags>', 'with --engine slurm: further flags for sbatch, such as "--partition=long --time=2:00:00 --cpus-per-task=4"')
    .option('--retries <n>', 'with --engine slurm: how often a failed task is tried again (default 2)')
    .option('--poll <seconds>', 'with --engine slurm: how often the queue is looked at (default 5)')
    .option('--dry-run', 'say what would be computed, and with --engine slurm show the script; compute nothing');
}

/** Whether the command runs on a cluster. Throws InputError for flags that mean nothing on this machine alone. */
export function isOnCluster(flags: Pick<CommonFlags, 'engine'> & ClusterFlags): boolean {
  if (flags.engine === 'slurm') return true;
  for (const name of ['tasks', 'slurm', 'retries', 'poll'] as const) {
    if (flags[name] !== undefined) throw new InputError('means nothing without --engine slurm', { flag: `--${name} ${flags[name]}` });
  }
  return false;
}

/** `--tasks`. */
export function taskCount({ tasks = '16' }: ClusterFlags): number {
  return whole('--tasks', tasks, 1, 100_000);
}

/** A key of all that goes into a task. */
export function taskKey(input: unknown): string {
  return sha256OfText(JSON.stringify(input)).slice(0, 16);
}

/** What a cluster would be told. */
export function clusterScript(tasks: readonly ClusterTask[], folder: string, flags: ClusterFlags): string {
  const files = filesOf(folder);
  return describeSubmission(tasks, files, splitFlags(flags.slurm ?? ''), (list) => arrayScript(files.folder, list, thisProgram()));
}

/** What Ctrl-C says while a cluster works. */
export function detachedWords(out: string): string {
  return `no longer watching; the tasks go on. \`gyrelight tasks ${out}\` shows them (--cancel stops them), --resume gathers what they made`;
}

/** Has a cluster do tasks, with a line of progress. */
export async function runOnCluster(tasks: readonly ClusterTask[], folder: string, flags: ClusterFlags, { progress, signal }: CancelContext): Promise<void> {
  const poll = Number(flags.poll ?? '5');
  if (!(poll >= 0.1 && poll <= 3600)) throw new InputError('expected seconds from 0.1 to 3600', { flag: `--poll ${flags.poll}` });
  await runTasks(tasks, {
    files: filesOf(folder),
    program: thisProgram(),
    extra: splitFlags(flags.slurm ?? ''),
    retries: whole('--retries', flags.retries ?? '2', 0, 1000),
    pollMs: 1000 * poll,
    signal,
    onStatus: ({ total, done, running, waiting, retried, failed }) => {
      const detail = [`${running} running`, `${waiting} waiting`, retried > 0 ? `${retried} tried again` : '', failed > 0 ? `${failed} failed` : ''].filter(Boolean).join(', ');
      progress.show('on the cluster', done, total, 'tasks', detail);
    },
  });
}

/** The files of the run whose folder for the cluster this is. */
export function filesOf(folder: string): ArrayFiles {
  const full = resolve(folder);
  return new ArrayFiles(full, sha256OfText(full).slice(0, 8));
}

function thisProgram(): Program {
  return { node: process.execPath, script: resolve(process.argv[1]) };
}

function whole(flag: string, text: string, least: number, most: number): number {
  const value = Number(text);
  if (/^\d+$/.test(text) && value >= least && value <= most) return value;
  throw new InputError(`expected a whole number from ${least} to ${most}`, { flag: `${flag} ${text}` });
}
