import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { readText, writeWhole } from '../files/node-io.ts';
import type { Likelihood } from '../infer/likelihood.ts';
import type { Fit } from '../infer/fit.ts';
import type { NestedRun } from '../infer/nested.ts';
import { posteriorOfRuns, runNestedOnce, samplePosterior, type Posterior, type PosteriorRequest, type SamplingEffort, type SamplingState } from '../infer/posterior.ts';
import type { DataSet } from '../infer/types.ts';
import { InputError } from '../units/input-error.ts';
import { forwardOf, type FreeHypothesis } from '../infer/hypothesis.ts';
import type { RunContext } from './run-context.ts';

/** Checkpoints of sampling runs that are not finished, one file each, written whole or not at all. */
export class SamplingStore {
  private readonly folder: string;

  constructor(out: string) {
    this.folder = join(out, 'unfinished');
  }

  /** The checkpoint kept under a key; a file that is damaged counts as none. */
  find(key: string): SamplingState | undefined {
    const path = this.path(key);
    if (!existsSync(path)) return undefined;
    try {
      return JSON.parse(readText(path)) as SamplingState;
    } catch {
      return undefined;
    }
  }

  keep(key: string, state: SamplingState): void {
    writeWhole(this.path(key), JSON.stringify(state));
  }

  /** Where a finished nested-sampling run is kept under a key. */
  runPath(key: string): string {
    return join(this.folder, `${key}.run.json`);
  }

  /** The finished run kept under a key, written whole or not at all. */
  findRun(key: string): NestedRun | undefined {
    return existsSync(this.runPath(key)) ? (JSON.parse(readText(this.runPath(key))) as NestedRun) : undefined;
  }

  keepRun(key: string, run: NestedRun): void {
    writeWhole(this.runPath(key), JSON.stringify(run));
  }

  private path(key: string): string {
    return join(this.folder, `${key}.sampling.json`);
  }
}

/** The key of one of several nested-sampling runs, and its seed. */
export function runOf(key: string, seed: number, run: number): { readonly key: string; readonly seed: number } {
  return { key: `${key}-${run + 1}`, seed: seed + run };
}

/** Checkpoints are written no more often than this; which are written changes no result. */
const checkpointEveryMs = 3000;

/** What a hypothesis is sampled with. */
export interface SamplingJob {
  readonly prepared: FreeHypothesis;
  readonly fit: Pick<Fit, 'values' | 'covariance'>;
  readonly data: DataSet;
  readonly likelihood: Likelihood;
  readonly seed: number;
  readonly effort: SamplingEffort;
  readonly label: string;
  readonly store: SamplingStore;
  /** Of all that goes into it. */
  readonly key: string;
  /** Go on from checkpoints. */
  readonly resume: boolean;
}

/** Samples the posterior of a fitted hypothesis, with checkpoints. */
export function sampleHypothesis(job: SamplingJob, method: 'walkers' | 'nested', context: RunContext): Promise<Posterior> {
  return samplePosterior({ ...requestOf(job, context), method });
}

/** The posterior of several nested-sampling runs; `known`: those that are finished need not be done again. */
export async function sampleByRuns(job: SamplingJob, runs: number, known: boolean, context: RunContext): Promise<Posterior> {
  const done: NestedRun[] = [];
  for (let k = 0; k < runs; k++) {
    const { key, seed } = runOf(job.key, job.seed, k);
    const before = known ? job.store.findRun(key) : undefined;
    done.push(before ?? (await sampleOnce({ ...job, key, seed, label: `${job.label}, run ${k + 1} of ${runs}` }, context)));
  }
  return posteriorOfRuns({ ...job, parameters: job.prepared.parameters }, done);
}

/** One nested-sampling run, kept under its key. */
export async function sampleOnce(job: SamplingJob, context: RunContext): Promise<NestedRun> {
  const run = await runNestedOnce(requestOf(job, context));
  job.store.keepRun(job.key, run);
  return run;
}

function requestOf({ prepared, fit, data, likelihood, seed, effort, label, store, key, resume }: SamplingJob, { pool, progress, signal }: RunContext): Omit<PosteriorRequest, 'method'> {
  let written = Date.now();
  const state = resume ? store.find(key) : undefined;
  return {
    parameters: prepared.parameters,
    forward: forwardOf(prepared, data, pool.backend),
    likelihood,
    fit,
    seed,
    effort,
    ...(state && { resume: state }),
    signal,
    onCheckpoint: (now, { evaluations, words }) => {
      progress.show(label, evaluations, Math.max(evaluations + 1, effort.maxEvaluations ?? 0), 'models', words);
      if (Date.now() - written < checkpointEveryMs) return;
      written = Date.now();
      store.keep(key, now);
    },
  };
}

/** The flags that say how much a sampler may spend. */
export interface SamplingFlags {
  readonly live?: string;
  readonly steps: string;
  readonly evaluations?: string;
}

/** `--live`, `--steps` and `--evaluations` as an effort. */
export function effortOf({ live, steps, evaluations }: SamplingFlags): SamplingEffort {
  return {
    maxSteps: wholeNumber('--steps', steps, 100, 10_000_000),
    ...(live !== undefined && { livePoints: wholeNumber('--live', live, 20, 100_000) }),
    ...(evaluations !== undefined && { maxEvaluations: wholeNumber('--evaluations', evaluations, 100, 1_000_000_000) }),
  };
}

function wholeNumber(flag: string, text: string, least: number, most: number): number {
  const value = Number(text);
  if (/^\d+$/.test(text) && value >= least && value <= most) return value;
  throw new InputError(`expected a whole number from ${least} to ${most}`, { flag: `${flag} ${text}` });
}
