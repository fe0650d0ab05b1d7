import { availableParallelism } from 'node:os';
import { Option, type Command } from 'commander';
import type { Override } from '../scene/overrides.ts';
import { startNodePool } from '../run/node-pool.ts';
import type { RayPool } from '../run/ray-pool.ts';
import { InputError } from '../units/input-error.ts';
import { makeProgress, type Progress } from './progress.ts';

/** The flags that commands share, as commander gives them. */
export interface CommonFlags {
  readonly out: string;
  readonly set?: readonly string[];
  readonly seed?: number;
  readonly workers?: number;
  readonly engine: string;
  readonly json?: boolean;
  readonly quiet?: boolean;
}

/** Stopped by the user (Ctrl-C). */
export class Cancelled extends Error {
  constructor(message = 'stopped; nothing half-written was left') {
    super(message);
  }
}

const mostWorkers = 256;

/** Adds the common flags to a command that computes and writes files. */
export function addCommonFlags(command: Command): Command {
  return addOutputFlags(addSceneFlags(command))
    .option('--workers <n>', 'threads (default: one per core)', wholeNumber('--workers', 1, mostWorkers))
    .addOption(new Option('--engine <engine>', 'where to compute').choices(['local', 'slurm']).default('local'));
}

/** Adds the flags about where results go and what is said. */
export function addOutputFlags(command: Command): Command {
  return command
    .option('--out <dir>', 'folder for the results, made where missing', 'out')
    .option('--json', 'a machine-readable summary on stdout')
    .option('--quiet', 'no progress and no words, errors only');
}

/** Adds the flag that changes values of a file before it is checked. */
export function addSetFlag(command: Command, file: string, example: string): Command {
  return command.option('--set <path=value>', `change a value of the ${file}, such as ${example} (repeatable)`, collect);
}

/** Adds the flags that change a scene before it is checked. */
export function addSceneFlags(command: Command): Command {
  return addSetFlag(command, 'scene', 'field.halo.strength="3 uG"')
    .option('--seed <n>', 'seed of all random streams, in place of the scene’s', wholeNumber('--seed', 0, Number.MAX_SAFE_INTEGER));
}

/** `--set` and `--seed` as overrides of a scene's text. */
export function overridesOf({ set = [], seed }: Pick<CommonFlags, 'set' | 'seed'>): readonly Override[] {
  const overrides = set.map((text): Override => {
    const equals = text.indexOf('=');
    const flag = `--set ${text}`;
    if (equals < 1) throw new InputError('expected path=value, such as galaxy.inclination="40 deg"', { flag });
    return { path: text.slice(0, equals).trim(), value: text.slice(equals + 1).trim(), flag };
  });
  if (seed !== undefined) overrides.push({ path: 'numerics.seed', value: String(seed), flag: `--seed ${seed}` });
  return overrides;
}

/** A line of progress, and the user's Ctrl-C. */
export interface CancelContext {
  readonly progress: Progress;
  readonly signal: AbortSignal;
}

/** What a running command works with: threads, a line of progress, and the user's Ctrl-C. */
export interface RunContext extends CancelContext {
  readonly pool: RayPool;
}

/** Runs a computation that Ctrl-C aborts; it becomes `Cancelled` then, which says `words`. */
export async function withCancel<T>(flags: Pick<CommonFlags, 'quiet'>, work: (context: CancelContext) => Promise<T>, words?: string): Promise<T> {
  const controller = new AbortController();
  const stop = (): void => controller.abort(new Cancelled(words));
  process.once('SIGINT', stop);
  process.once('SIGTERM', stop);
  const progress = makeProgress(process.stderr, flags.quiet ?? false);
  try {
    return await work({ progress, signal: controller.signal });
  } finally {
    progress.close();
    process.off('SIGINT', stop);
    process.off('SIGTERM', stop);
  }
}

/**
 * Runs a computation with a pool of threads, which is closed whatever happens; Ctrl-C aborts it
 * and becomes Cancelled. Refuses engines that do not serve the command.
 */
export async function withRunContext<T>(flags: CommonFlags, work: (context: RunContext) => Promise<T>): Promise<T> {
  if (flags.engine !== 'local') {
    throw new InputError('this command is no work for a cluster; allowed is local (a cluster serves sweep, and fit and rank where they sample by nested sampling)', { flag: `--engine ${flags.engine}` });
  }
  return withCancel(flags, async (context) => {
    const pool = startNodePool(flags.workers ?? availableParallelism());
    try {
      return await work({ ...context, pool });
    } finally {
      await pool.close();
    }
  });
}

/** Words for the user, on stderr; silent where --quiet or --json asks for it. */
export function sayWords(flags: Pick<CommonFlags, 'quiet' | 'json'>, ...lines: readonly string[]): void {
  if (flags.quiet) return;
  const stream = flags.json ? process.stderr : process.stdout;
  for (const line of lines) stream.write(`${line}\n`);
}

function collect(value: string, previous: readonly string[] = []): readonly string[] {
  return [...previous, value];
}

function wholeNumber(flag: string, least: number, most: number): (text: string) => number {
  return (text) => {
    const value = Number(text);
    if (!/^\d+$/.test(text) || value < least || value > most) {
      throw new InputError(`expected a whole number from ${least} to ${most}`, { flag: `${flag} ${text}` });
    }
    return value;
  };
}
