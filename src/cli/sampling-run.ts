import { existsSync } from 'node:fs';
import { join } from 'node:path';
import { readText, writeWhole } from '../files/node-io.ts';
import type { Likelihood } from '../infer/likelihood.ts';
import { samplePosterior, type Posterior, type SamplingEffort, type SamplingState } from '../infer/posterior.ts';
import type { DataSet } from '../infer/types.ts';
import { InputError } from '../units/input-error.ts';
import { forwardOf } from '../infer/hypothesis.ts';
import type { FittedRun } from './hypothesis-run.ts';
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

  private path(key: string): string {
    return join(this.folder, `${key}.sampling.json`);
  }
}

/** Checkpoints are written no more often than this; which are written changes no result. */
const checkpointEveryMs = 3000;

/** Samples the posterior of a fitted hypothesis, with checkpoints under `key`. */
export async function sampleHypothesis(
  run: FittedRun, method: 'walkers' | 'nested', data: DataSet, likelihood: Likelihood, seed: number, effort: SamplingEffort,
  context: RunContext, label: string, store: SamplingStore, key: string, resume: boolean,
): Promise<Posterior> {
  let written = Date.now();
  const state = resume ? store.find(key) : undefined;
  return samplePosterior({
    method,
    parameters: run.prepared.parameters,
    forward: forwardOf(run.prepared, data, context.pool.backend),
    likelihood,
    fit: run.fit,
    seed,
    effort,
    ...(state && { resume: state }),
    signal: context.signal,
    onCheckpoint: (now, { evaluations, words }) => {
      context.progress.show(label, evaluations, Math.max(evaluations + 1, effort.maxEvaluations ?? 0), 'models', words);
      if (Date.now() - written < checkpointEveryMs) return;
      written = Date.now();
      store.keep(key, now);
    },
  });
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
