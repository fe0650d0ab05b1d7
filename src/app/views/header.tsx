import { useRef } from 'preact/hooks';
import type { JSX } from 'preact';
import { takeIn } from '../document/take-in.ts';
import { pagesToStartFrom } from '../document/starts.ts';
import type { Store } from '../store.ts';
import { TakeAway } from './take-away.tsx';

/** Fits every column to the observation and ranks them; while it runs, the same button stops it. */
function RankButton({ store }: { readonly store: Store }): JSX.Element {
  const { hasData, ranker } = store;
  const isRunning = ranker.running.value;
  return (
    <button
      type="button"
      class="rank"
      disabled={!hasData.value}
      title={!hasData.value ? 'Drop maps to rank geometries by' : 'Fit every column within its free parameters and rank them'}
      onClick={() => (isRunning ? ranker.stop() : void ranker.rank())}
    >
      {isRunning ? 'stop ranking' : 'rank'}
    </button>
  );
}

/** The bar at the top: what is studied, undo and redo, opening and taking away, light and dark. */
export function Header({ store }: { readonly store: Store }): JSX.Element {
  const { title, theme } = store.page.value;
  const picker = useRef<HTMLInputElement>(null);
  const open = (name: string): void => {
    const start = pagesToStartFrom.find((one) => one.name === name);
    if (start) void start.open(store);
  };
  return (
    <header class="bar">
      <h1 class="name">Gyrelight</h1>
      <input
        class="title"
        aria-label="Title of the study"
        value={title}
        onChange={(event) => {
          const next = event.currentTarget.value;
          store.edit((page) => ({ ...page, title: next }));
        }}
      />
      <span class="group">
        <button type="button" aria-label="Undo" title="Undo (Ctrl Z)" disabled={!store.canUndo.value} onClick={store.undo}>
          ↶
        </button>
        <button type="button" aria-label="Redo" title="Redo (Ctrl Shift Z)" disabled={!store.canRedo.value} onClick={store.redo}>
          ↷
        </button>
      </span>
      <span class="group">
        <select aria-label="Start from" value="" onChange={(event) => { open(event.currentTarget.value); event.currentTarget.value = ''; }}>
          <option value="">Start from …</option>
          {pagesToStartFrom.map(({ name, title: words }) => (
            <option key={name} value={name}>
              {words}
            </option>
          ))}
        </select>
        <button type="button" onClick={() => picker.current?.click()}>
          Open …
        </button>
        <input
          ref={picker}
          type="file"
          multiple
          hidden
          aria-label="Files to open"
          onChange={(event) => {
            const chosen = [...(event.currentTarget.files ?? [])];
            event.currentTarget.value = '';
            if (chosen.length > 0) void takeIn(store, chosen);
          }}
        />
        <TakeAway store={store} />
      </span>
      <RankButton store={store} />
      <button
        type="button"
        class="theme"
        aria-label={theme === 'light' ? 'Dark page' : 'Light page'}
        title={theme === 'light' ? 'Dark page' : 'Light page'}
        onClick={() => store.edit((page) => ({ ...page, theme: page.theme === 'light' ? 'dark' : 'light' }))}
      >
        {theme === 'light' ? '☾' : '☀'}
      </button>
    </header>
  );
}
