import { filesBeside, readText } from '../files/node-io.ts';
import { loadData } from '../files/load-data.ts';
import { sha256OfText } from '../files/sha256.ts';
import type { Fit } from '../infer/fit.ts';
import type { Likelihood } from '../infer/likelihood.ts';
import { parseStudy } from '../infer/study.ts';
import type { Method, Study } from '../infer/study-types.ts';
import type { DataSet } from '../infer/types.ts';
import type { Ring } from '../measure/ring-profile.ts';
import { InputError, nearestHint } from '../units/input-error.ts';
import { gatherAssumptions } from './assumptions.ts';
import { taskCount, type ClusterFlags } from './cluster-flags.ts';
import { commonLikelihood } from './judged-fit.ts';
import { fitKey, prepareHypothesis, type PreparedHypothesis } from './hypothesis-run.ts';
import { ringOf } from './ring-flag.ts';
import { overridesOf, sayWords, type CommonFlags } from './run-context.ts';
import { effortOf, SamplingStore, type SamplingFlags, type SamplingJob } from './sampling-run.ts';

/** The flags of commands that fit hypotheses of a study. */
export interface StudyFlags extends CommonFlags, SamplingFlags, ClusterFlags {
  readonly resume?: boolean;
  readonly ring?: string;
  readonly starts: string;
  /** Nested-sampling runs that are merged. */
  readonly runs?: string;
}

/** A study with its data, read and checked. */
export interface LoadedStudy {
  readonly file: string;
  readonly text: string;
  readonly study: Study;
  readonly data: DataSet;
  /** What the likelihoods of all hypotheses have in common. */
  readonly likelihood: Likelihood;
  readonly assumptions: readonly string[];
  readonly prepared: readonly PreparedHypothesis[];
  readonly ring: Ring;
  readonly seed: number;
}

/** Reads a study, its data and the scenes of its hypotheses (or of the one named), and says what is assumed. */
export function loadStudy(file: string, flags: StudyFlags, only?: string): LoadedStudy {
  const text = readText(file);
  const study = parseStudy(text, file);
  const { data, notes } = loadData(study.data, filesBeside(file), study.others);
  const overrides = overridesOf({ set: flags.set });
  const wanted = only === undefined ? study.hypotheses : study.hypotheses.filter(({ name }) => name === only);
  if (wanted.length === 0) {
    const names = study.hypotheses.map(({ name }) => name);
    throw new InputError(`the study has no hypothesis "${only}"${nearestHint(only ?? '', names)}; there are: ${names.join(', ')}`, { flag: '--hypothesis' });
  }
  // All of them, whichever is wanted: one with drawn turbulence decides in what maps are compared.
  const all = study.hypotheses.map((hypothesis) => prepareHypothesis(hypothesis, study, file, data, overrides));
  const prepared = all.filter((_, k) => wanted.includes(study.hypotheses[k]));
  const ring = ringOf(flags.ring, prepared[0].scene);
  const assumptions = [...data.assumptions, ...notes];
  const likelihood = commonLikelihood(data, all, assumptions);
  sayWords(flags, ...gatherAssumptions(assumptions).map((sentence) => `assumed  ${sentence}`));
  return { file, text, study, data, likelihood, assumptions, prepared, ring, seed: flags.seed ?? study.seed };
}

/** A hypothesis with what its fit is kept under. */
export interface FitJob {
  readonly prepared: PreparedHypothesis;
  readonly key: string;
}

/** What a fit of a hypothesis is kept under. */
export function keyOfFit({ text, data }: LoadedStudy, flags: Pick<StudyFlags, 'starts'>, hypothesis: PreparedHypothesis): string {
  return fitKey(text, hypothesis, data, effortOfFit(flags));
}

/** How hard `--starts` has a fit look. */
export function effortOfFit({ starts }: Pick<StudyFlags, 'starts'>): { readonly starts: number; readonly descents: number } {
  return { starts: startsOf(starts), descents: 2 };
}

/** How a fitted hypothesis is sampled, wherever that is done. */
export function samplingJob(
  loaded: LoadedStudy, flags: SamplingFlags & Pick<StudyFlags, 'out' | 'resume'>,
  { prepared, key }: FitJob, { fit, likelihood }: { readonly fit: Pick<Fit, 'values' | 'covariance'>; readonly likelihood: Likelihood }, label: string,
): SamplingJob {
  const { data, seed } = loaded;
  return { prepared, fit, data, likelihood, seed, effort: effortOf(flags), label, store: new SamplingStore(flags.out), key: samplingKey(loaded, flags, key), resume: flags.resume ?? false };
}

/** What a sampling run is kept under; checkpoints of the two methods tell themselves apart. */
export function samplingKey({ seed }: Pick<LoadedStudy, 'seed'>, flags: SamplingFlags, fitKeyText: string): string {
  return sha256OfText(JSON.stringify([fitKeyText, effortOf(flags), seed])).slice(0, 24);
}

/** `--runs`; on a cluster as many as `--tasks`, unless said. */
export function runCount({ runs, tasks, engine }: StudyFlags, method: Method): number {
  if (runs === undefined) return engine === 'slurm' ? taskCount({ tasks: tasks ?? '4' }) : 1;
  if (method !== 'nested') throw new InputError(`means nothing for ${method}; it is for nested sampling`, { flag: `--runs ${runs}` });
  const value = Number(runs);
  if (/^\d+$/.test(runs) && value >= 1 && value <= 10_000) return value;
  throw new InputError('expected a whole number from 1 to 10000', { flag: `--runs ${runs}` });
}

function startsOf(text: string): number {
  const value = Number(text);
  if (/^\d+$/.test(text) && value <= 10_000) return value;
  throw new InputError('expected a whole number from 0 to 10000', { flag: `--starts ${text}` });
}
