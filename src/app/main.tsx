import { render } from 'preact';
import { config } from 'zod';
import { makeCrew } from './compute/crew.ts';
import { exampleStudy } from './document/examples.ts';
import { fetchFiles } from './document/starts.ts';
import { recallPage } from './keep.ts';
import { makeStore } from './store.ts';
import { Page } from './views/page.tsx';

// Generated checkers would need `unsafe-eval`.
config({ jitless: true });

const workers = Math.max(1, Math.min(6, navigator.hardwareConcurrency || 2));
const startWorker = (): Worker => new Worker(new URL('./compute/page-worker.ts', import.meta.url), { type: 'module' });
const crew = makeCrew(workers, startWorker);
/** Long work has workers of its own, so that drawing never waits for it. */
const fitCrew = makeCrew(workers, startWorker);

async function start(): Promise<void> {
  const kept = await recallPage();
  const example = exampleStudy();
  const store = makeStore(kept?.page ?? example.page, crew, fitCrew);
  const root = document.getElementById('page');
  if (root) render(<Page store={store} />, root);
  store.addFiles(kept?.files ?? (await fetchFiles(example.files)));
  store.keepFrom();
}

void start();
