import { computed, effect, signal, untracked } from '@preact/signals';
import { sha256OfText } from '../files/sha256.ts';
import type { ColumnPicture, ObservedPicture } from './compute/column-picture.ts';
import type { Crew } from './compute/crew.ts';
import { findFile } from './compute/memory-files.ts';
import type { DataFiles, Trouble } from './compute/messages.ts';
import type { Edit } from './document/edits.ts';
import { commit, redo, settle, startHistory, undo, type History } from './document/history.ts';
import type { PageDocument } from './document/page-document.ts';
import { makeRanker } from './ranking.ts';
import { keepFiles, keepPage } from './keep.ts';
import { filesNeeded, hasObservation, studyText } from './document/page-study.ts';

/** What is known of a column's picture: the last good one stays until a newer one is in. */
export interface ColumnState {
  readonly picture?: ColumnPicture;
  /** Why the text as it stands has no picture. */
  readonly trouble?: Trouble;
  readonly waitsFor?: 'preview' | 'exact';
}

/** A place on the sky, offsets from the galaxy's centre. */
export interface SkyCursor {
  readonly eastArcsec: number;
  readonly northArcsec: number;
}

export type PageFiles = Readonly<Record<string, Uint8Array>>;

/** The state of the page and all that changes it. */
export type Store = ReturnType<typeof makeStore>;

/** A store for a document; `crew` draws what the document says, as soon as it says it, `fitCrew` fits when asked. */
export function makeStore(start: PageDocument, crew: Crew, fitCrew: Crew) {
  const history = signal<History>(startHistory(start));
  const files = signal<PageFiles>({});
  const columns = signal<Readonly<Record<string, ColumnState>>>({});
  const observed = signal<{ readonly picture?: ObservedPicture; readonly trouble?: Trouble }>({});
  const cursor = signal<SkyCursor | undefined>(undefined);
  const closeUp = signal<string | undefined>(undefined);
  const note = signal<string>('');
  const page = computed(() => history.value.present);

  /** The files that scenes name, and where all of them are there the study's data, as workers need them. */
  const data = computed((): DataFiles => {
    const { columns: all, study } = page.value;
    const named = Object.keys(files.value).filter((name) => all.some(({ scene }) => scene.includes(name)));
    const needed = hasObservation({ study }) ? filesNeeded({ study }) : [];
    const found = [...needed, ...named].flatMap((name): [string, Uint8Array][] => {
      const bytes = findFile(files.value, name);
      return bytes ? [[name, bytes]] : [];
    });
    const isWhole = needed.length > 0 && needed.every((name) => findFile(files.value, name) !== undefined);
    const key = sha256OfText(JSON.stringify([isWhole && study.data, found.map(([name, bytes]) => [name, bytes.length, bytes.subarray(0, 4096).reduce((sum, byte, k) => (sum + byte * (k + 1)) % 1e9, 0)])])).slice(0, 16);
    const text = isWhole ? studyText({ ...page.value, columns: [{ ...all[0], hypothesis: {} }] }) : undefined;
    return { key, files: Object.fromEntries(found), ...(text !== undefined && { studyText: text }) };
  });
  const hasData = computed(() => data.value.studyText !== undefined);

  const ranker = makeRanker(fitCrew, page, data);

  const patch = (id: string, change: ColumnState): void => {
    columns.value = { ...columns.value, [id]: change };
  };

  /** The request that each column's picture answers, or is being asked with. */
  const asked = new Map<string, string>();

  const draw = async (id: string, name: string, sceneText: string, ringKpc: readonly [number, number] | undefined, dataKey: string): Promise<void> => {
    const request = JSON.stringify([sceneText, ringKpc, dataKey]);
    if (asked.get(id) === request) return;
    const isFirst = !asked.has(id);
    asked.set(id, request);
    const task = { kind: 'draw' as const, name, sceneText, dataKey, ...(ringKpc && { ringKpc }) };
    for (const exact of isFirst ? [true] : [false, true]) {
      patch(id, { ...columns.peek()[id], waitsFor: exact ? 'exact' : 'preview' });
      const outcome = await crew.ask(id, { ...task, exact });
      if (asked.get(id) !== request) return;
      if ('value' in outcome) patch(id, { picture: outcome.value, ...(!exact && { waitsFor: 'exact' as const }) });
      else if ('trouble' in outcome) {
        patch(id, { picture: columns.peek()[id]?.picture, trouble: outcome.trouble });
        return;
      } else return;
    }
  };

  let observedAsked = '';
  const drawObserved = async (name: string, sceneText: string, ringKpc: readonly [number, number] | undefined, dataKey: string | undefined): Promise<void> => {
    const request = JSON.stringify([dataKey, sceneText, ringKpc]);
    if (request === observedAsked) return;
    observedAsked = request;
    if (dataKey === undefined) {
      observed.value = {};
      return;
    }
    const outcome = await crew.ask('observed', { kind: 'observed', name, sceneText, dataKey, ...(ringKpc && { ringKpc }) });
    if (request !== observedAsked) return;
    if ('value' in outcome) observed.value = { picture: outcome.value };
    else if ('trouble' in outcome) observed.value = { ...observed.peek(), trouble: outcome.trouble };
  };

  effect(() => {
    const { columns: all, ringKpc, chosen } = page.value;
    const given = data.value;
    untracked(() => {
      crew.setData(given);
      for (const id of asked.keys()) if (!all.some((column) => column.id === id)) asked.delete(id);
      for (const { id, name, scene } of all) void draw(id, name, scene, ringKpc, given.key);
      const leading = all.find(({ id }) => id === chosen) ?? all[0];
      void drawObserved(leading.name, leading.scene, ringKpc, given.studyText === undefined ? undefined : given.key);
    });
  });

  return {
    page,
    files,
    columns,
    observed,
    cursor,
    closeUp,
    note,
    data,
    hasData,
    ranker,
    /** One place of a column, offsets in kpc; a newer question takes the place of an older one. */
    lookAt: (name: string, sceneText: string, northKpc: number, eastKpc: number) => crew.ask('place', { kind: 'place', name, sceneText, northKpc, eastKpc, dataKey: data.peek().key }),
    canUndo: computed(() => history.value.past.length > 0),
    canRedo: computed(() => history.value.future.length > 0),
    /** Changes the document; changes of one `name` in a row are one step to undo. */
    edit: (change: Edit, name?: string): void => {
      history.value = commit(history.peek(), change(page.peek()), name);
    },
    /** Ends a series of changes, as when a knob is let go. */
    settle: (): void => {
      history.value = settle(history.peek());
    },
    undo: (): void => {
      history.value = undo(history.peek());
    },
    redo: (): void => {
      history.value = redo(history.peek());
    },
    /** Opens another document; the present one can be had back by undo. */
    open: (next: PageDocument, more: PageFiles): void => {
      files.value = { ...files.peek(), ...more };
      history.value = commit(history.peek(), next);
      closeUp.value = undefined;
    },
    /** From now on, keeps every change in the browser, so that it survives a reload. */
    keepFrom: (): void => {
      let timer: ReturnType<typeof setTimeout> | undefined;
      effect(() => {
        const kept = page.value;
        clearTimeout(timer);
        timer = setTimeout(() => void keepPage(kept), 300);
      });
      effect(() => void keepFiles(files.value));
    },
    /** Adds files to those that the page holds; a file of the same name is replaced. */
    addFiles: (more: PageFiles): void => {
      files.value = { ...files.peek(), ...more };
    },
  };
}
