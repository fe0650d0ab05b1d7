import { existsSync } from 'node:fs';
import { readText } from '../files/node-io.ts';
import { ResourceError } from '../files/resource-error.ts';
import { mostInArray, type ArrayFiles, type ArrayRecord, type Program } from './array-files.ts';
import { cancelJobs, hasEnded, isHeldByFailure, queuedTasks, submitArray, type QueuedTask } from './slurm.ts';

/** A piece of work for a node of the cluster. */
export interface ClusterTask {
  /** A hash of all that goes into it: the same key is the same work. */
  readonly key: string;
  /** What the node reads, plain data. */
  readonly input: unknown;
  /** In messages, such as `rows 0 to 99`. */
  readonly label: string;
  /** Whether its result is there, whole. */
  isDone(): boolean;
}

/** How far the tasks of a run are. */
export interface ClusterStatus {
  readonly total: number;
  readonly done: number;
  readonly running: number;
  readonly waiting: number;
  /** Tried again so far, and given up. */
  readonly retried: number;
  readonly failed: number;
}

export interface ClusterOptions {
  readonly files: ArrayFiles;
  readonly program: Program;
  /** Flags for `sbatch`. */
  readonly extra: readonly string[];
  /** How often a failed task is tried again. */
  readonly retries: number;
  readonly pollMs: number;
  readonly onStatus?: (status: ClusterStatus) => void;
  readonly signal?: AbortSignal;
}

/** Polls after which a task that ended without a result has failed: shared disks show files late. */
const patience = 2;
/** Polls in a row that may find no answer from Slurm. */
const silence = 20;

/**
 * Has tasks done by job arrays of the user's cluster, and returns when every result is there. Safe to
 * stop and start again at any moment: results are files, arrays that are in the queue are found there,
 * and only what is neither done nor queued is submitted. A task that fails is submitted again up to
 * `retries` times. Throws ResourceError that names what failed for good (with the end of what it said)
 * once all else is done, and one where tasks are cancelled on the cluster. Needs no accounting.
 */
export async function runTasks(tasks: readonly ClusterTask[], options: ClusterOptions): Promise<void> {
  const { files, pollMs, retries, signal } = options;
  const failures = new Map<string, number>();
  const endedFor = new Map<string, number>();
  const failed = new Map<string, string>();
  let [isFirst, silent] = [true, 0];
  for (;;) {
    signal?.throwIfAborted();
    const undone = tasks.filter((task) => !failed.has(task.key) && !task.isDone());
    if (undone.length === 0) break;
    const records = files.records();
    const latest = latestOf(records, undone);
    let queue: readonly QueuedTask[];
    try {
      queue = await queuedTasks([...new Set([...latest.values()].map(({ record }) => record.name))]);
      silent = 0;
    } catch (error) {
      if (!(error instanceof ResourceError) || ++silent > silence) throw error;
      await pause(pollMs, signal);
      continue;
    }
    const inQueue = new Map(queue.map((task) => [`${task.array} ${task.index}`, task]));
    const submit: ClusterTask[] = [];
    const cancelled: ClusterTask[] = [];
    let [running, waiting] = [0, 0];
    for (const task of undone) {
      const place = latest.get(task.key);
      const queued = place && inQueue.get(`${place.record.name} ${place.index}`);
      if (queued && !hasEnded(queued)) {
        if (queued.state === 'PENDING') waiting++;
        else running++;
        endedFor.delete(task.key);
        continue;
      }
      if (isFirst) {
        submit.push(task);
        continue;
      }
      if (queued?.state === 'CANCELLED') {
        cancelled.push(task);
        continue;
      }
      const polls = (endedFor.get(task.key) ?? 0) + 1;
      endedFor.set(task.key, polls);
      if (polls <= patience) {
        waiting++;
        continue;
      }
      endedFor.delete(task.key);
      if (queued && isHeldByFailure(queued.reason)) await cancelJobs([`${queued.jobId}_${queued.index}`]);
      const count = (failures.get(task.key) ?? 0) + 1;
      failures.set(task.key, count);
      if (count <= retries) submit.push(task);
      else failed.set(task.key, `${task.label}: ${queued?.state ?? 'no result'}${place ? lastWords(files.logOf(place.record, place.index)) : ''}`);
    }
    if (cancelled.length > 0) {
      throw new ResourceError(`${cancelled.length} task${cancelled.length === 1 ? ' was' : 's were'} cancelled on the cluster; what is done is kept, and --resume goes on`);
    }
    await submitAll(submit, options);
    isFirst = false;
    const retried = [...failures.values()].reduce((sum, count) => sum + Math.min(count, retries), 0);
    options.onStatus?.({ total: tasks.length, done: tasks.length - undone.length, running, waiting: waiting + submit.length, retried, failed: failed.size });
    await pause(pollMs, signal);
  }
  if (failed.size > 0) {
    const tried = `${retries + 1} time${retries === 0 ? '' : 's'}`;
    throw new ResourceError(`${failed.size} of ${tasks.length} tasks failed ${tried}; the others are done and kept, and --resume tries these again:\n  ${[...failed.values()].join('\n  ')}`);
  }
}

/** The script and the call that a run would submit, for the user to read. */
export function describeSubmission(tasks: readonly ClusterTask[], files: ArrayFiles, extra: readonly string[], script: (list: string) => string): string {
  const keys = tasks.slice(0, mostInArray).map(({ key }) => key);
  const record = { number: 1, name: files.nameOf(1), keys };
  const rest = tasks.length > keys.length ? `\n# and further arrays of at most ${mostInArray} tasks, ${tasks.length} tasks in all` : '';
  return `${script(`${files.folder}/arrays/1.list`)}\n# submitted by: sbatch --parsable ${files.parameters(record, extra).join(' ')} ${files.folder}/arrays/1.sh${rest}`;
}

/** Where each task stands in the latest array that has it. */
function latestOf(records: readonly ArrayRecord[], tasks: readonly ClusterTask[]): Map<string, { readonly record: ArrayRecord; readonly index: number }> {
  const wanted = new Set(tasks.map(({ key }) => key));
  const latest = new Map<string, { readonly record: ArrayRecord; readonly index: number }>();
  for (const record of records) record.keys.forEach((key, index) => void (wanted.has(key) && latest.set(key, { record, index })));
  return latest;
}

async function submitAll(tasks: readonly ClusterTask[], { files, program, extra }: ClusterOptions): Promise<void> {
  for (const task of tasks) files.keepTask(task.key, task.input);
  for (let from = 0; from < tasks.length; from += mostInArray) {
    const record = files.addArray(tasks.slice(from, from + mostInArray).map(({ key }) => key), program);
    files.keepJob(record, await submitArray(files.scriptOf(record), files.parameters(record, extra)));
  }
}

/** The last line of what a task said. */
function lastWords(log: string): string {
  if (!existsSync(log)) return '';
  const last = readText(log).trim().split('\n').at(-1);
  return last ? `: ${last}` : '';
}

function pause(ms: number, signal: AbortSignal | undefined): Promise<void> {
  return new Promise((resolve, reject) => {
    const stop = (): void => {
      clearTimeout(timer);
      reject(signal?.reason as Error);
    };
    const timer = setTimeout(() => {
      signal?.removeEventListener('abort', stop);
      resolve();
    }, ms);
    signal?.addEventListener('abort', stop, { once: true });
  });
}
