import { join } from 'node:path';
import type { Command } from 'commander';
import { readText } from '../files/node-io.ts';
import { doNestedTask, type NestedTaskInput } from './nested-cluster.ts';
import { doSweepTask, type SweepTaskInput } from './sweep-cluster.ts';

/** `gyrelight task FOLDER KEY`: what a node of a cluster runs; not for users, so help does not show it. */
export function addTask(program: Command): void {
  program.command('task <folder> <key>', { hidden: true }).action(doTask);
}

async function doTask(folder: string, key: string): Promise<void> {
  const input = JSON.parse(readText(join(folder, 'tasks', `${key}.json`))) as SweepTaskInput | NestedTaskInput;
  // Cores that the user asked for by --cpus-per-task.
  const workers = Math.max(1, Number(process.env.SLURM_CPUS_PER_TASK ?? '1') || 1);
  if (input.kind === 'sweep') await doSweepTask(input, key, workers);
  else await doNestedTask(input, workers);
}
