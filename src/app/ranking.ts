import { computed, signal, type ReadonlySignal } from '@preact/signals';
import { rankHypotheses, type Ranking } from '../infer/rank.ts';
import type { Crew } from './compute/crew.ts';
import type { DataFiles, Trouble } from './compute/messages.ts';
import type { FitPicture } from './compute/work-fit.ts';
import type { PageDocument } from './document/page-document.ts';
import { studyText } from './document/page-study.ts';

/** How far a column's fit is. */
export interface FitState {
  /** What was fitted: a fit of another scene or other data is out of date. */
  readonly request: string;
  /** The column's scene then. */
  readonly scene: string;
  readonly progress?: { readonly done: number; readonly expected: number; readonly chi2: number; readonly secondsLeft?: number };
  readonly fit?: FitPicture;
  readonly trouble?: Trouble;
}

/** Fits of the page's columns to the observation, and their ranking once all are in. */
export function makeRanker(crew: Crew, page: ReadonlySignal<PageDocument>, data: ReadonlySignal<DataFiles>) {
  const fits = signal<Readonly<Record<string, FitState>>>({});
  const patch = (id: string, state: FitState): void => {
    fits.value = { ...fits.peek(), [id]: state };
  };
  const requestOf = (column: PageDocument['columns'][number]): string =>
    JSON.stringify([column.name, column.scene, column.hypothesis, data.value.key]);
  /** A fit belongs to its column as it was fitted, and as it is with the best values taken. */
  const belongs = (column: PageDocument['columns'][number], state: FitState | undefined): boolean =>
    state !== undefined && (state.request === requestOf(column) || (state.fit !== undefined && state.request === requestOf({ ...column, scene: state.scene }) && state.fit.sceneText === column.scene));
  const current = computed(() => page.value.columns.map((column) => ({ column, state: belongs(column, fits.value[column.id]) ? fits.value[column.id] : undefined })));
  const ranking = computed((): Ranking | undefined => {
    const done = current.value.flatMap(({ state }) => (state?.fit ? [state.fit.fitted] : []));
    return done.length > 0 && done.length === current.value.length ? rankHypotheses(done) : undefined;
  });
  const running = computed(() => Object.values(fits.value).some(({ progress }) => progress !== undefined));

  const fitOne = async (column: PageDocument['columns'][number], text: string, dataKey: string): Promise<void> => {
    const request = requestOf(column);
    const known = fits.peek()[column.id];
    if (known?.fit && belongs(column, known)) return;
    const asked = { request, scene: column.scene };
    const begun = performance.now();
    patch(column.id, { ...asked, progress: { done: 0, expected: 1, chi2: NaN } });
    const outcome = await crew.ask(column.id, { kind: 'fit', name: column.name, sceneText: column.scene, studyText: text, dataKey }, (done, expected, chi2) => {
      const each = (performance.now() - begun) / 1000 / Math.max(1, done);
      if (fits.peek()[column.id]?.progress) patch(column.id, { ...asked, progress: { done, expected, chi2, secondsLeft: each * (expected - done) } });
    });
    if ('value' in outcome) patch(column.id, { ...asked, fit: outcome.value });
    else patch(column.id, { ...asked, ...('trouble' in outcome && { trouble: outcome.trouble }) });
  };

  return {
    fits,
    ranking,
    running,
    /** The fit that belongs to a column as it is. */
    fitOf: (id: string): FitState | undefined => current.value.find(({ column }) => column.id === id)?.state,
    /** Fits every column that has no fit yet, as many at a time as the crew has workers. */
    rank: async (): Promise<void> => {
      const given = data.peek();
      if (given.studyText === undefined) return;
      crew.setData(given);
      const text = studyText(page.peek());
      await Promise.all(page.peek().columns.map((column) => fitOne(column, text, given.key)));
    },
    stop: (): void => {
      for (const id of Object.keys(fits.peek())) crew.cancel(id);
    },
  };
}
