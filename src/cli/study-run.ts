import { filesBeside, readText } from '../files/node-io.ts';
import { loadData } from '../files/load-data.ts';
import { sha256OfText } from '../files/sha256.ts';
import type { Likelihood } from '../infer/likelihood.ts';
import { jointLikelihood } from '../infer/other-data.ts';
import { parseStudy } from '../infer/study.ts';
import type { Method, Study } from '../infer/study-types.ts';
import type { DataSet } from '../infer/types.ts';
import type { Ring } from '../measure/ring-profile.ts';
import { InputError, nearestHint } from '../units/input-error.ts';
import { gatherAssumptions } from './assumptions.ts';
import { FitStore } from './fit-store.ts';
import { finishHypothesis, fitHypothesis, fitKey, prepareHypothesis, type PreparedHypothesis } from './hypothesis-run.ts';
import { predictProfiles, type SampledRun } from './posterior-files.ts';
import { ringOf } from './ring-flag.ts';
import { overridesOf, sayWords, withRunContext, type CommonFlags } from './run-context.ts';
import { effortOf, sampleHypothesis, SamplingStore, type SamplingFlags } from './sampling-run.ts';

/** The flags of commands that fit hypotheses of a study. */
export interface StudyFlags extends CommonFlags, SamplingFlags {
  readonly resume?: boolean;
  readonly ring?: string;
  readonly starts: string;
}

/** A study with its data, read and checked. */
export interface LoadedStudy {
  readonly file: string;
  readonly text: string;
  readonly study: Study;
  readonly data: DataSet;
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
  const prepared = wanted.map((hypothesis) => prepareHypothesis(hypothesis, study, file, data, overrides));
  const ring = ringOf(flags.ring, prepared[0].scene);
  const assumptions = [...data.assumptions, ...notes];
  sayWords(flags, ...gatherAssumptions(assumptions).map((sentence) => `assumed  ${sentence}`));
  return { file, text, study, data, likelihood: jointLikelihood(data), assumptions, prepared, ring, seed: flags.seed ?? study.seed };
}

/** Fits, and where the method asks for it samples, every hypothesis of a study; checkpoints make it resumable. */
export async function runStudy(loaded: LoadedStudy, method: Method, flags: StudyFlags): Promise<{ runs: readonly SampledRun[]; seconds: number; clear: () => void }> {
  const { text, prepared, data, likelihood, ring, seed } = loaded;
  const effort = { starts: startsOf(flags.starts), descents: 2 };
  const sampling = effortOf(flags);
  const started = Date.now();
  const store = new FitStore(flags.out);
  const states = new SamplingStore(flags.out);
  const runs = await withRunContext(flags, async (context) => {
    const done: SampledRun[] = [];
    for (const [k, hypothesis] of prepared.entries()) {
      const key = fitKey(text, hypothesis, data, effort);
      const place = prepared.length > 1 ? ` (${k + 1} of ${prepared.length})` : '';
      const known = flags.resume ? store.find(key) : undefined;
      const fit = await fitHypothesis(hypothesis, data, likelihood, seed, effort, context, `fitting ${hypothesis.name}${place}`, known);
      store.keep(key, fit);
      const run = await finishHypothesis(hypothesis, fit, data, ring, context);
      if (method === 'least-squares') {
        done.push({ ...run, drawn: [] });
        continue;
      }
      const stateKey = sha256OfText(JSON.stringify([key, method, sampling, seed])).slice(0, 24);
      const posterior = await sampleHypothesis(
        run, method, data, likelihood, seed, sampling, context, `sampling ${hypothesis.name}${place}`, states, stateKey, flags.resume ?? false,
      );
      done.push({ ...run, posterior, drawn: await predictProfiles(run, posterior, data, ring, seed, context) });
    }
    return done;
  });
  return { runs, seconds: (Date.now() - started) / 1000, clear: () => store.clear() };
}

function startsOf(text: string): number {
  const value = Number(text);
  if (/^\d+$/.test(text) && value <= 10_000) return value;
  throw new InputError('expected a whole number from 0 to 10000', { flag: `--starts ${text}` });
}
