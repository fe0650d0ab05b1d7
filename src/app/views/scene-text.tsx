import type { JSX } from 'preact';
import { useEffect, useRef, useState } from 'preact/hooks';
import type { InputError } from '../../units/input-error.ts';
import { changeColumn } from '../document/edits.ts';
import type { PageColumn } from '../document/page-document.ts';
import { readScene } from '../document/read-scene.ts';
import type { Store } from '../store.ts';

/** Time without a key before what is written is taken, ms. */
const pauseMs = 350;

/** A column's scene as text, taken as it is written; what is wrong stands under the character it begins at. */
export function SceneText({ store, column }: { readonly store: Store; readonly column: PageColumn }): JSX.Element {
  const [draft, setDraft] = useState(column.scene);
  const timer = useRef<ReturnType<typeof setTimeout> | undefined>(undefined);
  useEffect(() => {
    setDraft(column.scene);
  }, [column.id, column.scene]);
  const problem = readScene(draft, column.name, store.files.value).error;
  const write = (text: string): void => {
    setDraft(text);
    clearTimeout(timer.current);
    timer.current = setTimeout(() => store.edit(changeColumn(column.id, { scene: text }), `write ${column.id}`), pauseMs);
  };
  return (
    <div class="scene-text">
      <textarea
        aria-label={`Scene of ${column.name} as text`}
        aria-invalid={problem !== undefined}
        spellcheck={false}
        rows={Math.min(28, draft.split('\n').length + 1)}
        value={draft}
        onInput={(event) => write(event.currentTarget.value)}
        onBlur={store.settle}
      />
      {problem && <Problem text={draft} problem={problem} />}
    </div>
  );
}

/** The line that is wrong, a mark under the character, and why. */
export function Problem({ text, problem }: { readonly text: string; readonly problem: InputError }): JSX.Element {
  const { line, column } = problem.place ?? {};
  const wrong = line === undefined ? undefined : text.split('\n')[line - 1];
  return (
    <div class="problem" role="alert">
      {wrong !== undefined && (
        <pre>
          {`${String(line).padStart(4)}  ${wrong}\n`}
          <span class="caret">{`${' '.repeat(5 + Math.max(1, column ?? 1))}▲`}</span>
        </pre>
      )}
      <p>{problem.reason}</p>
    </div>
  );
}
