import type { Method } from '../infer/study-types.ts';
import { detachedWords, isOnCluster, runOnCluster } from './cluster-flags.ts';
import { FitStore } from './fit-store.ts';
import { finishHypothesis, type FittedRun } from './hypothesis-run.ts';
import { judgedFit, type JudgedFit } from './judged-fit.ts';
import { nestedTasks, refuseOther } from './nested-cluster.ts';
import { predictProfiles, type SampledRun } from './posterior-files.ts';
import { withCancel, withRunContext, type RunContext } from './run-context.ts';
import { effortOf, sampleByRuns, sampleHypothesis } from './sampling-run.ts';
import { effortOfFit, keyOfFit, runCount, samplingJob, type FitJob, type LoadedStudy, type StudyFlags } from './study-load.ts';
import { foldersOf } from './sweep-store.ts';

/** Fits, and where the method asks for it samples, every hypothesis of a study; checkpoints make it resumable. */
export async function runStudy(loaded: LoadedStudy, method: Method, flags: StudyFlags): Promise<{ runs: readonly SampledRun[]; seconds: number; clear: () => void }> {
  const isCluster = isOnCluster(flags);
  if (isCluster) refuseOther(method);
  const runsEach = runCount(flags, method);
  // Flags that are wrong are refused before anything is computed.
  effortOf(flags);
  effortOfFit(flags);
  const started = Date.now();
  const store = new FitStore(flags.out);
  const fits = await withRunContext({ ...flags, engine: 'local' }, (context) => fitAll(loaded, flags, store, context));
  if (isCluster) {
    const { cluster } = foldersOf(flags.out);
    await withCancel(flags, (context) => runOnCluster(nestedTasks(loaded, flags, runsEach), cluster, flags, context), detachedWords(flags.out));
  }
  const { data, ring, seed } = loaded;
  const runs = await withRunContext({ ...flags, engine: 'local' }, async (context) => {
    const done: SampledRun[] = [];
    for (const [k, { run, job, judged }] of fits.entries()) {
      if (method === 'least-squares') {
        done.push({ ...run, drawn: [] });
        continue;
      }
      const own = samplingJob(loaded, flags, job, judged, `sampling ${run.prepared.name}${placeOf(k, fits.length)}`);
      const several = method === 'nested' && run.prepared.parameters.length > 0 && (runsEach > 1 || isCluster);
      const posterior = several ? await sampleByRuns(own, runsEach, isCluster || own.resume, context) : await sampleHypothesis(own, method, context);
      done.push({ ...run, posterior, drawn: await predictProfiles(run, posterior, data, ring, seed, context) });
    }
    return done;
  });
  return { runs, seconds: (Date.now() - started) / 1000, clear: () => store.clear() };
}

/** A fitted hypothesis, and what its fit is kept under. */
interface FittedJob {
  readonly run: FittedRun;
  readonly job: FitJob;
  readonly judged: JudgedFit;
}

async function fitAll(loaded: LoadedStudy, flags: StudyFlags, store: FitStore, context: RunContext): Promise<FittedJob[]> {
  const { prepared, data, likelihood, ring, seed } = loaded;
  const effort = effortOfFit(flags);
  const done: FittedJob[] = [];
  for (const [k, hypothesis] of prepared.entries()) {
    const key = keyOfFit(loaded, flags, hypothesis);
    const known = flags.resume ? store.find(key) : undefined;
    const judged = await judgedFit(hypothesis, data, likelihood, seed, effort, context, `fitting ${hypothesis.name}${placeOf(k, prepared.length)}`, known);
    store.keep(key, judged.fit, judged.scatterAt);
    done.push({ run: await finishHypothesis(hypothesis, judged.fit, data, ring, context), job: { prepared: hypothesis, key }, judged });
  }
  return done;
}

function placeOf(k: number, count: number): string {
  return count > 1 ? ` (${k + 1} of ${count})` : '';
}
