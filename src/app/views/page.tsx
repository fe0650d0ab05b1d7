import { useEffect, useRef, useState } from 'preact/hooks';
import type { JSX } from 'preact';
import { takeIn } from '../document/take-in.ts';
import type { Store } from '../store.ts';
import { CloseUp } from './close-up.tsx';
import { Header } from './header.tsx';
import { Knobs } from './knobs.tsx';
import { LineUp } from './line-up.tsx';

/** The whole page: the line-up, the knobs of the chosen column, and a close-up over them where one is open. */
export function Page({ store }: { readonly store: Store }): JSX.Element {
  const { theme } = store.page.value;
  const [isOver, setOver] = useState(false);
  const depth = useRef(0);
  useEffect(() => {
    document.documentElement.dataset.theme = theme;
  }, [theme]);
  useEffect(() => {
    const onKey = (event: KeyboardEvent): void => undoByKey(event, store);
    addEventListener('keydown', onKey);
    return () => removeEventListener('keydown', onKey);
  }, [store]);
  const take = (event: DragEvent): void => {
    event.preventDefault();
    depth.current = 0;
    setOver(false);
    const dropped = [...(event.dataTransfer?.files ?? [])];
    if (dropped.length > 0) void takeIn(store, dropped);
  };
  return (
    <div
      class={isOver ? 'page is-over' : 'page'}
      onDragEnter={(event) => {
        if (event.dataTransfer?.types.includes('Files')) {
          depth.current++;
          setOver(true);
        }
      }}
      onDragLeave={() => {
        depth.current = Math.max(0, depth.current - 1);
        if (depth.current === 0) setOver(false);
      }}
      onDragOver={(event) => event.preventDefault()}
      onDrop={take}
    >
      <Header store={store} />
      <main>
        <Notice store={store} />
        <LineUp store={store} />
        <Knobs store={store} />
      </main>
      {store.closeUp.value !== undefined && <CloseUp store={store} id={store.closeUp.value} />}
      {isOver && <div class="drop-hint">Drop FITS maps, tables, scenes, a study or a page</div>}
    </div>
  );
}

/** One line that says what happened last, or what is wrong; read aloud as it changes. */
function Notice({ store }: { readonly store: Store }): JSX.Element {
  const verdict = store.ranker.ranking.value?.verdict;
  const text = [store.note.value, verdict].filter(Boolean).join(' ');
  return (
    <div class="notice" role="status" aria-live="polite">
      {text && (
        <>
          <span>{text}</span>
          <button type="button" class="plain" aria-label="Dismiss this message" onClick={() => (store.note.value = '')}>
            ✕
          </button>
        </>
      )}
    </div>
  );
}

/** Ctrl or ⌘ with Z and Y, except while a text is being written: there they belong to the text. */
function undoByKey(event: KeyboardEvent, store: Store): void {
  if (!(event.ctrlKey || event.metaKey) || event.altKey) return;
  const { target } = event;
  const isWriting = target instanceof HTMLTextAreaElement || (target instanceof HTMLInputElement && target.type === 'text');
  const key = event.key.toLowerCase();
  if (isWriting || (key !== 'z' && key !== 'y')) return;
  event.preventDefault();
  if (key === 'y' || event.shiftKey) store.redo();
  else store.undo();
}
