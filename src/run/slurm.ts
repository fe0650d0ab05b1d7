import { execFile } from 'node:child_process';
import { ResourceError } from '../files/resource-error.ts';
import { InputError } from '../units/input-error.ts';

/** One task of an array as the queue has it. */
export interface QueuedTask {
  readonly array: string;
  readonly index: number;
  readonly jobId: string;
  readonly state: string;
  readonly reason: string;
}

/** States of a task that will not go on. Others count as waiting or running. */
const ended = ['BOOT_FAIL', 'CANCELLED', 'COMPLETED', 'DEADLINE', 'FAILED', 'NODE_FAIL', 'OUT_OF_MEMORY', 'PREEMPTED', 'REVOKED', 'TIMEOUT'];

/** Whether a task will not go on by itself; so is one that Slurm holds after it could not be launched. */
export function hasEnded({ state, reason }: Pick<QueuedTask, 'state' | 'reason'>): boolean {
  return ended.includes(state) || isHeldByFailure(reason);
}

export function isHeldByFailure(reason: string): boolean {
  return /launch.failed.requeued.held/i.test(reason);
}

/** Submits a script as an array of `count` tasks and returns the job's number. Throws InputError where Slurm refuses it. */
export async function submitArray(script: string, parameters: readonly string[]): Promise<string> {
  const said = await call('sbatch', ['--parsable', ...parameters, script]);
  return said.trim().split('\n').at(-1)?.split(';')[0] ?? '';
}

/** Every task of the arrays of these names that Slurm knows of, ended ones too as long as it remembers them. */
export async function queuedTasks(arrays: readonly string[]): Promise<QueuedTask[]> {
  if (arrays.length === 0) return [];
  return parseQueue(await call('squeue', ['--noheader', '--array', '--states=all', `--name=${arrays.join(',')}`, '--format=%j|%K|%F|%T|%r']));
}

/** Lines `name|index|job|state|reason` of the queue; what is no task of an array is left out. */
export function parseQueue(text: string): QueuedTask[] {
  return text.split('\n').flatMap((line): QueuedTask[] => {
    const [array, index, jobId, state, reason = ''] = line.trim().split('|');
    return /^\d+$/.test(index ?? '') && state ? [{ array, index: Number(index), jobId, state, reason }] : [];
  });
}

/** Cancels whole arrays, or single tasks of them (`12_3`). */
export async function cancelJobs(ids: readonly string[]): Promise<void> {
  if (ids.length > 0) await call('scancel', [...ids]);
}

/** Extra flags as a shell would part them: quotes hold words together. Throws InputError for an open quote. */
export function splitFlags(text: string): string[] {
  const words: string[] = [];
  const pattern = /\s*((?:[^\s"']|"[^"]*"|'[^']*')+)/y;
  const trimmed = text.trim();
  while (pattern.lastIndex < trimmed.length) {
    const match = pattern.exec(trimmed);
    if (!match) throw new InputError('a quote is opened and never closed', { flag: `--slurm ${text}` });
    words.push(match[1].replace(/"([^"]*)"|'([^']*)'/g, (_, double: string | undefined, single: string | undefined) => double ?? single ?? ''));
  }
  return words;
}

/** Runs one of Slurm's commands; its error is told in its own words. */
function call(command: string, parameters: readonly string[]): Promise<string> {
  return new Promise((resolve, reject) => {
    execFile(command, parameters, { maxBuffer: 1 << 28, encoding: 'utf8' }, (error, stdout, stderr) => {
      if (!error) return resolve(stdout);
      const code = 'code' in error ? error.code : '';
      if (String(code) === 'ENOENT') return reject(new InputError(`there is no \`${command}\` on this machine: run this where jobs are submitted`, { flag: '--engine slurm' }));
      const said = stderr.trim().split('\n').join('; ') || error.message;
      reject(command === 'sbatch' ? new InputError(`${command}: ${said}`, { flag: '--engine slurm' }) : new ResourceError(`${command}: ${said}`));
    });
  });
}
