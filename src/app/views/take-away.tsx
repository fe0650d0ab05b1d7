import type { JSX } from 'preact';
import { takings } from '../document/takings.ts';
import type { Store } from '../store.ts';

/** The menu of what can be saved. */
export function TakeAway({ store }: { readonly store: Store }): JSX.Element {
  return (
    <select
      aria-label="Take away"
      value=""
      onChange={(event) => {
        const taking = takings.find(({ name }) => name === event.currentTarget.value);
        event.currentTarget.value = '';
        if (taking) void taking.take(store);
      }}
    >
      <option value="">Take away …</option>
      {takings.map(({ name, title }) => (
        <option key={name} value={name}>
          {title}
        </option>
      ))}
    </select>
  );
}
