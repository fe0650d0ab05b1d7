import { existsSync } from 'node:fs';
import { resolve } from 'node:path';
import { ResourceError } from '../files/resource-error.ts';
import type { Method } from '../infer/study-types.ts';
import type { ClusterTask } from '../run/cluster.ts';
import { InputError } from '../units/input-error.ts';
import { clusterScript, isOnCluster, taskKey } from './cluster-flags.ts';
import { FitStore } from './fit-store.ts';
import { likelihoodAt } from './judged-fit.ts';
import { withRunContext } from './run-context.ts';
import { runOf, sampleOnce, SamplingStore } from './sampling-run.ts';
import { keyOfFit, loadStudy, runCount, samplingJob, samplingKey, type LoadedStudy, type StudyFlags } from './study-load.ts';
import { foldersOf } from './sweep-store.ts';

/** Every nested-sampling run of every hypothesis as a task. */
export function nestedTasks(loaded: LoadedStudy, flags: StudyFlags, runs: number): ClusterTask[] {
  const out = resolve(flags.out);
  const shared = { study: resolve(loaded.file), out, set: flags.set ?? [], seed: loaded.seed, starts: flags.starts, steps: flags.steps, ...(flags.live !== undefined && { live: flags.live }), ...(flags.evaluations !== undefined && { evaluations: flags.evaluations }) };
  const store = new SamplingStore(out);
  return loaded.prepared.filter(({ parameters }) => parameters.length > 0).flatMap((prepared) => {
    const key = keyOfFit(loaded, flags, prepared);
    return Array.from({ length: runs }, (_, k): ClusterTask => {
      const input: NestedTaskInput = { kind: 'nested', ...shared, hypothesis: prepared.name, fitKey: key, run: k };
      const path = store.runPath(runOf(samplingKey(loaded, flags, key), loaded.seed, k).key);
      return { key: taskKey(input), input, label: `${prepared.name}, run ${k + 1}`, isDone: () => existsSync(path) };
    });
  });
}

/** What would be computed, for `--dry-run`. */
export function dryRunWords(loaded: LoadedStudy, method: Method, flags: StudyFlags): string[] {
  const each = runCount(flags, method);
  const words = loaded.prepared.map(({ name, parameters }) => `${name}: ${method}${each > 1 ? `, ${each} runs` : ''}, free: ${parameters.map(({ path }) => path).join(', ') || 'nothing'}`);
  if (!isOnCluster(flags)) return words;
  refuseOther(method);
  return [...words, '', clusterScript(nestedTasks(loaded, flags, each), foldersOf(flags.out).cluster, flags)];
}

/** A cluster is for what falls into independent parts. */
export function refuseOther(method: Method): void {
  if (method !== 'nested') throw new InputError(`a cluster serves nested sampling, as independent runs; here the method is ${method}`, { flag: '--engine slurm' });
}

/** One nested-sampling run as a node is told of it. */
export interface NestedTaskInput {
  readonly kind: 'nested';
  readonly study: string;
  readonly hypothesis: string;
  readonly out: string;
  readonly set: readonly string[];
  readonly seed: number;
  readonly starts: string;
  readonly steps: string;
  readonly live?: string;
  readonly evaluations?: string;
  /** Under which the driver has kept the fit that the run begins from. */
  readonly fitKey: string;
  readonly run: number;
}

/** Does one run on a node, from where an earlier try of it has come to. */
export async function doNestedTask(input: NestedTaskInput, workers: number): Promise<void> {
  const flags = { ...input, workers, engine: 'local', quiet: true, resume: true };
  const loaded = loadStudy(input.study, flags, input.hypothesis);
  const [prepared] = loaded.prepared;
  const key = keyOfFit(loaded, flags, prepared);
  const fit = key === input.fitKey ? new FitStore(input.out).find(key) : undefined;
  if (!fit) throw new ResourceError(`${input.study}: the study, its data or its scenes have changed since the tasks were submitted, or the fit is gone`);
  await withRunContext(flags, async (context) => {
    const likelihood = await likelihoodAt(prepared, loaded.data, loaded.likelihood, fit.scatterAt ?? fit.values, context);
    const job = samplingJob(loaded, flags, { prepared, key }, { fit, likelihood }, `sampling ${prepared.name}`);
    const own = runOf(job.key, job.seed, input.run);
    if (!job.store.findRun(own.key)) await sampleOnce({ ...job, ...own }, context);
  });
}
