import * as Comlink from 'comlink';
import { config } from 'zod';
import { gridSource } from '../../files/grid-source.ts';
import { loadData, type FileSource } from '../../files/load-data.ts';
import { parseStudy } from '../../infer/study.ts';
import { localBackend } from '../../ray/job.ts';
import { parseScene } from '../../scene/parse-scene.ts';
import { InputError } from '../../units/input-error.ts';
import { memoryFiles } from './memory-files.ts';
import type { AnyResult, Outcome, PageWorker, Task } from './messages.ts';
import { workFit, type FitProgressTold } from './work-fit.ts';
import { workPlace } from './work-place.ts';
import { makeWorkData, pictureData, workColumn, type WorkData } from './work-column.ts';

// The entry of a worker of the page: one task at a time, which a message can cancel.

// Generated checkers would need `unsafe-eval`.
config({ jitless: true });

const backend = localBackend();
let running: AbortController | undefined;
let held: { readonly key: string; readonly files: FileSource; readonly data?: WorkData } | undefined;

const worker: PageWorker = {
  setData: (data) => outcomeOf(async () => {
    const files = memoryFiles(data.files);
    held = { key: data.key, files };
    if (data.studyText !== undefined) held = { key: data.key, files, data: readData(data.studyText, files) };
    return null;
  }),
  run: (task, tell) => {
    running?.abort();
    const controller = new AbortController();
    running = controller;
    return outcomeOf(() => perform(task, controller.signal, tell));
  },
  cancel: async () => running?.abort(),
};

async function perform(task: Task, signal: AbortSignal, tell: FitProgressTold): Promise<AnyResult> {
  if (held?.key !== task.dataKey) throw new Error('the worker has other files than the task needs');
  const { files, data } = held;
  const scene = parseScene(task.sceneText, task.name, [], gridSource(files));
  if (task.kind === 'place') return workPlace(scene, task.northKpc, task.eastKpc, backend, signal);
  if (task.kind !== 'draw' && !data) throw new Error('the worker has no data');
  if (task.kind === 'observed' && data) return pictureData(data, scene, task.ringKpc);
  if (task.kind === 'fit' && data) return workFit(parseStudy(task.studyText, 'study.yaml'), task.name, scene, task.sceneText, data, backend, signal, tell);
  if (task.kind !== 'draw') throw new Error(`unknown task ${task.kind}`);
  return workColumn({ scene, exact: task.exact, ringKpc: task.ringKpc, ...(data && { seen: data }) }, backend, signal, () => performance.now());
}

function readData(studyText: string, files: FileSource): WorkData {
  const study = parseStudy(studyText, 'study.yaml');
  const { data, notes } = loadData(study.data, files, study.others);
  return makeWorkData(data, notes);
}

async function outcomeOf<Value>(work: () => Promise<Value>): Promise<Outcome<Value>> {
  try {
    return { value: await work() };
  } catch (error) {
    if (error instanceof DOMException && error.name === 'AbortError') return { cancelled: true };
    if (error instanceof InputError) return { trouble: { reason: error.reason, isInput: true, ...(error.place && { place: error.place }) } };
    return { trouble: { reason: error instanceof Error ? error.message : String(error), isInput: false } };
  }
}

Comlink.expose(worker);
