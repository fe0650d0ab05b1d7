import type { JSX } from 'preact';
import { useEffect, useState } from 'preact/hooks';
import { parse, stringify } from 'yaml';
import { parseStudy } from '../../infer/study.ts';
import { InputError } from '../../units/input-error.ts';
import type { PageDocument } from '../document/page-document.ts';
import { studyText } from '../document/page-study.ts';
import type { Store } from '../store.ts';
import { Problem } from './scene-text.tsx';

/** All of the study but its title and hypotheses, as text: the data with their noise, signs, masks and the like. */
export function StudyText({ store }: { readonly store: Store }): JSX.Element {
  const { study } = store.page.value;
  const text = textOf(study);
  const [draft, setDraft] = useState(text);
  const [problem, setProblem] = useState<InputError | undefined>();
  useEffect(() => {
    setDraft(text);
    setProblem(undefined);
  }, [text]);
  const take = (): void => {
    const found = checked(draft, store.page.peek());
    if (found instanceof InputError) {
      setProblem(found);
      return;
    }
    setProblem(undefined);
    store.edit((page) => ({ ...page, study: found }));
  };
  return (
    <div class="scene-text">
      <p class="soft">What the observation is, as a study file says it. Noise, signs, masks and zero levels are mended here.</p>
      <textarea aria-label="The study's data as text" aria-invalid={problem !== undefined} spellcheck={false} rows={Math.min(24, draft.split('\n').length + 1)} value={draft} onInput={(event) => setDraft(event.currentTarget.value)} />
      <div>
        <button type="button" disabled={draft === text} onClick={take}>
          take it
        </button>
      </div>
      {problem && <Problem text={draft} problem={problem} />}
    </div>
  );
}

function textOf(study: PageDocument['study']): string {
  return Object.keys(study).length === 0 ? 'data: []\n' : stringify(study, { lineWidth: 0 });
}

/** The study's keys as values, or what is wrong with them. */
function checked(text: string, page: PageDocument): PageDocument['study'] | InputError {
  try {
    const study = parse(text) as PageDocument['study'];
    // The whole file is checked; its lines begin after the version and the title, where ours begin at 1.
    if (Array.isArray(study?.data) && study.data.length > 0) parseStudy(studyText({ ...page, study }), 'study.yaml');
    return study ?? {};
  } catch (error) {
    if (error instanceof InputError) return new InputError(error.reason);
    if (error instanceof Error && error.name.startsWith('YAML')) return new InputError(error.message);
    throw error;
  }
}
