import type { JSX } from 'preact';
import { numberText, withError } from '../../figure/number-text.ts';
import { changeColumn } from '../document/edits.ts';
import type { PageColumn } from '../document/page-document.ts';
import type { Store } from '../store.ts';

/** How a column stands against the observation as it is, and in the ranking of all columns at their best. */
export function Verdict({ store, column }: { readonly store: Store; readonly column: PageColumn }): JSX.Element {
  const { picture, trouble } = store.columns.value[column.id] ?? {};
  if (trouble) return <p class="trouble">{trouble.reason}</p>;
  if (!picture) return <p class="soft">drawing …</p>;
  const { fit, exact, seconds } = picture;
  if (!fit) return <p class="soft">{exact ? `drawn in ${numberText(seconds, 2)} s` : 'preview'}; drop maps to compare with</p>;
  const others = store.page.value.columns.flatMap(({ id }) => {
    const other = store.columns.value[id]?.picture?.fit;
    return other ? [other.chi2] : [];
  });
  const above = fit.chi2 - Math.min(...others);
  return (
    <div class="verdict">
      <p>
        <strong>χ²/N {numberText(fit.chi2 / fit.count, 3)}</strong>
        <span class="soft">{above > 0 ? ` as it stands, Δχ² +${numberText(above, 3)}` : ' as it stands, the lowest'}</span>
      </p>
      <AtItsBest store={store} column={column} />
    </div>
  );
}

/** The fit of a column: how far it is, or where it stands among all. */
function AtItsBest({ store, column }: { readonly store: Store; readonly column: PageColumn }): JSX.Element | null {
  const state = store.ranker.fitOf(column.id);
  if (!state) return null;
  const { progress, fit, trouble } = state;
  if (trouble) return <p class="trouble">{trouble.reason}</p>;
  if (progress) {
    const { done, expected, chi2, secondsLeft } = progress;
    return (
      <p class="soft">
        <progress max={expected} value={done} aria-label={`Fit of ${column.name}`} /> {done} models
        {Number.isFinite(chi2) && `, χ² ${numberText(chi2, 4)}`}
        {secondsLeft !== undefined && `, about ${numberText(Math.ceil(secondsLeft), 2)} s left`}
      </p>
    );
  }
  if (!fit) return <p class="soft">stopped</p>;
  const ranked = store.ranker.ranking.value?.hypotheses;
  const place = ranked?.findIndex(({ name }) => name === fit.fitted.name) ?? -1;
  const deltaBic = place >= 0 ? ranked?.[place].deltaBic : undefined;
  const isTaken = column.scene === fit.sceneText;
  return (
    <>
      <p>
        <strong>
          {place >= 0 && `${place + 1}. `}χ²/N {numberText(fit.fitted.chi2 / (fit.fitted.residualCount - fit.fitted.parameters), 3)}
        </strong>
        <span class="soft"> at its best{deltaBic !== undefined && deltaBic > 0 ? `, ΔBIC ${numberText(deltaBic, 3)}` : ''}</span>
      </p>
      <details>
        <summary>best values</summary>
        <ul class="best">
          {fit.best.map(({ path, value, error, unit }) => (
            <li key={path}>
              {path.replace(/^[a-zA-Z]+\./, '')} = {withError(value, error, unit)}
            </li>
          ))}
        </ul>
      </details>
      {!isTaken && (
        <button type="button" onClick={() => store.edit(changeColumn(column.id, { scene: fit.sceneText }))}>
          take its best values
        </button>
      )}
    </>
  );
}
