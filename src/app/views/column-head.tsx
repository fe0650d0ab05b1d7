import type { JSX } from 'preact';
import { hypothesisStyle, pageTheme } from '../../figure/theme.ts';
import { changeColumn, copyColumn, dropColumn, moveColumn } from '../document/edits.ts';
import type { PageColumn } from '../document/page-document.ts';
import type { Store } from '../store.ts';

interface ColumnHeadProps {
  readonly store: Store;
  readonly column: PageColumn;
  readonly index: number;
}

/** A column's name and what can be done with it. */
export function ColumnHead({ store, column, index }: ColumnHeadProps): JSX.Element {
  const { chosen, differenceFrom, columns } = store.page.value;
  const { id, name } = column;
  const state = store.columns.value[id];
  const isChosen = chosen === id;
  const style = hypothesisStyle(index, pageTheme);
  const act = (what: string): void => {
    if (what === 'copy') store.edit(copyColumn(id));
    if (what === 'drop') store.edit(dropColumn(id));
    if (what === 'left') store.edit(moveColumn(id, -1));
    if (what === 'right') store.edit(moveColumn(id, 1));
    if (what === 'difference') store.edit((page) => ({ ...page, differenceFrom: differenceFrom === id ? undefined : id }));
  };
  return (
    <div class={isChosen ? 'column-head is-chosen' : 'column-head'}>
      <svg class="swatch" width="26" height="8" aria-hidden="true">
        <path d="M0,4H26" stroke={style.colour} stroke-dasharray={style.dash} stroke-width="2.5" />
      </svg>
      <input
        aria-label={`Name of column ${index + 1}`}
        value={name}
        onFocus={() => store.edit((page) => ({ ...page, chosen: id }), `choose ${id}`)}
        onChange={(event) => {
          const next = event.currentTarget.value.trim();
          if (next) store.edit(changeColumn(id, { name: next }));
        }}
      />
      <span class="acts">
        <button type="button" aria-pressed={isChosen} title="Show its knobs" onClick={() => store.edit((page) => ({ ...page, chosen: id }), `choose ${id}`)}>
          knobs
        </button>
        <button type="button" title="One column, one place: sightline, spectra, shape" onClick={() => (store.closeUp.value = id)}>
          close-up
        </button>
        <select aria-label={`More for ${name}`} value="" onChange={(event) => { act(event.currentTarget.value); event.currentTarget.value = ''; }}>
          <option value="">⋯</option>
          <option value="copy">copy</option>
          <option value="left" disabled={index === 0}>move left</option>
          <option value="right" disabled={index === columns.length - 1}>move right</option>
          <option value="difference">{differenceFrom === id ? 'show all as they are' : 'show others less this'}</option>
          <option value="drop" disabled={columns.length === 1}>drop</option>
        </select>
      </span>
      <span class="state">{state?.trouble ? 'not as written' : state?.waitsFor ? (state.waitsFor === 'exact' ? 'drawing …' : 'preview …') : differenceFrom === id ? 'taken off the others' : ''}</span>
    </div>
  );
}

/** The observation's head: it can be taken off the others, or put away. */
export function ObservedHead({ store }: { readonly store: Store }): JSX.Element {
  const { differenceFrom } = store.page.value;
  const isReference = differenceFrom === 'observed';
  return (
    <div class="column-head">
      <span class="observed-name">observation</span>
      <span class="acts">
        <button
          type="button"
          aria-pressed={isReference}
          title="Show every column less the observation"
          onClick={() => store.edit((page) => ({ ...page, differenceFrom: isReference ? undefined : 'observed' }))}
        >
          differences
        </button>
        <button
          type="button"
          title="Put the maps away; undo brings them back"
          onClick={() => store.edit((page) => ({ ...page, study: { ...page.study, data: [] }, ...(isReference && { differenceFrom: undefined }) }))}
        >
          put away
        </button>
      </span>
      <span class="state">{store.observed.value.trouble ? 'cannot be read' : ''}</span>
    </div>
  );
}

/** Adds a copy of the chosen column at the end. */
export function AddColumn({ store }: { readonly store: Store }): JSX.Element {
  return (
    <button type="button" aria-label="Add a column" title="Add a column: a copy of the chosen one" onClick={() => store.edit(copyColumn(store.page.peek().chosen))}>
      +
    </button>
  );
}
