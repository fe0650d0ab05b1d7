import type { JSX } from 'preact';
import type { PanelKind } from '../document/panel-files.ts';

/** The small menu at a panel: as what it can be taken away. */
export function TakePanel<Kind extends PanelKind>({ title, kinds, onTake }: { readonly title: string; readonly kinds: readonly Kind[]; readonly onTake: (kind: Kind) => Promise<void> }): JSX.Element {
  return (
    <select
      class="take"
      aria-label={`Take away: ${title}`}
      title="Take this away"
      value=""
      onChange={(event) => {
        const kind = kinds.find((one) => one === event.currentTarget.value);
        event.currentTarget.value = '';
        if (kind) void onTake(kind);
      }}
    >
      <option value="">⤓</option>
      {kinds.map((kind) => (
        <option key={kind} value={kind}>
          {kind.toUpperCase()}
        </option>
      ))}
    </select>
  );
}
