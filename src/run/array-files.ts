import { existsSync, mkdirSync, readdirSync } from 'node:fs';
import { join } from 'node:path';
import { readText, unwritable, writeWhole } from '../files/node-io.ts';

/** How a node starts the program: its Node and the built script, by full paths. */
export interface Program {
  readonly node: string;
  readonly script: string;
}

/** An array of tasks that was written, and submitted where it has a job. */
export interface ArrayRecord {
  /** The job's name in the queue. */
  readonly name: string;
  readonly number: number;
  /** Task `k` of the array has the k-th key. */
  readonly keys: readonly string[];
  readonly jobId?: string;
}

/** More tasks than this become several arrays: Slurm's usual limit is 1001. */
export const mostInArray = 1000;

/**
 * The files by which a driver, its tasks and the next driver know of each other, all in one folder:
 * `tasks/KEY.json` what a task is, `arrays/N.list` which tasks are in array N (written before it is
 * submitted), `arrays/N.sh` its script, `arrays/N.job` its number, `log/N-INDEX.txt` what a task said.
 */
export class ArrayFiles {
  constructor(readonly folder: string, readonly run: string) {}

  /** Writes down what a task is, once. */
  keepTask(key: string, input: unknown): void {
    const path = this.taskPath(key);
    if (!existsSync(path)) writeWhole(path, `${JSON.stringify(input)}\n`);
  }

  taskPath(key: string): string {
    return join(this.folder, 'tasks', `${key}.json`);
  }

  /** Every array so far, the latest last. */
  records(): ArrayRecord[] {
    const folder = join(this.folder, 'arrays');
    if (!existsSync(folder)) return [];
    const numbers = readdirSync(folder).flatMap((name) => /^(\d+)\.list$/.exec(name)?.[1] ?? []).map(Number).sort((a, b) => a - b);
    return numbers.map((number) => {
      const job = this.path(number, 'job');
      return {
        name: this.nameOf(number), number,
        keys: readText(this.path(number, 'list')).trim().split('\n'),
        ...(existsSync(job) && { jobId: readText(job).trim() }),
      };
    });
  }

  /** Writes list and script of a new array. */
  addArray(keys: readonly string[], program: Program): ArrayRecord {
    const number = (this.records().at(-1)?.number ?? 0) + 1;
    try {
      mkdirSync(join(this.folder, 'log'), { recursive: true });
    } catch (error) {
      throw unwritable(error, this.folder);
    }
    writeWhole(this.path(number, 'sh'), arrayScript(this.folder, this.path(number, 'list'), program));
    writeWhole(this.path(number, 'list'), `${keys.join('\n')}\n`);
    return { name: this.nameOf(number), number, keys };
  }

  keepJob({ number }: ArrayRecord, jobId: string): void {
    writeWhole(this.path(number, 'job'), `${jobId}\n`);
  }

  scriptOf({ number }: ArrayRecord): string {
    return this.path(number, 'sh');
  }

  logOf({ number }: ArrayRecord, index: number): string {
    return join(this.folder, 'log', `${number}-${index}.txt`);
  }

  /** What `sbatch` is told beside the script; `extra` comes last, so that it wins. */
  parameters({ number, name, keys }: Pick<ArrayRecord, 'number' | 'name' | 'keys'>, extra: readonly string[]): string[] {
    const log = join(this.folder, 'log', `${number}-`).replaceAll('%', '%%');
    return [`--job-name=${name}`, `--array=0-${keys.length - 1}`, `--output=${log}%a.txt`, '--open-mode=append', '--requeue', ...extra];
  }

  nameOf(number: number): string {
    return `gyrelight-${this.run}-${number}`;
  }

  private path(number: number, ending: 'list' | 'sh' | 'job'): string {
    return join(this.folder, 'arrays', `${number}.${ending}`);
  }
}

/** The script of an array: each of its tasks takes its key from the list. */
export function arrayScript(folder: string, list: string, { node, script }: Program): string {
  return [
    '#!/bin/sh',
    '# One task of a run of gyrelight. It does no harm to run it twice.',
    'set -eu',
    `key=$(sed -n "$((SLURM_ARRAY_TASK_ID + 1))p" ${quoted(list)})`,
    `exec ${quoted(node)} ${quoted(script)} task ${quoted(folder)} "$key"`,
    '',
  ].join('\n');
}

function quoted(text: string): string {
  return `'${text.replaceAll("'", `'\\''`)}'`;
}
