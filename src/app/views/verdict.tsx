import type { JSX } from 'preact';
import { numberText } from '../../figure/number-text.ts';
import type { PageColumn } from '../document/page-document.ts';
import type { Store } from '../store.ts';

/** How a column stands against the observation as it is, and after the last ranking on the page. */
export function Verdict({ store, column }: { readonly store: Store; readonly column: PageColumn }): JSX.Element {
  const { picture, trouble } = store.columns.value[column.id] ?? {};
  if (trouble) return <p class="trouble">{trouble.reason}</p>;
  if (!picture) return <p class="soft">drawing …</p>;
  const { fit, exact, seconds } = picture;
  if (!fit) return <p class="soft">{exact ? `drawn in ${numberText(seconds, 2)} s` : 'preview'}; drop maps to compare with</p>;
  const reduced = (one: NonNullable<typeof fit>): number => one.chi2 / one.count;
  const others = store.page.value.columns.flatMap(({ id }) => {
    const other = store.columns.value[id]?.picture?.fit;
    return other ? [other.chi2] : [];
  });
  const above = fit.chi2 - Math.min(...others);
  return (
    <p class="verdict">
      <strong>χ²/N {numberText(reduced(fit), 3)}</strong>
      <span class="soft">{above > 0 ? ` Δχ² +${numberText(above, 3)} to the best` : ' best of these'}</span>
    </p>
  );
}
