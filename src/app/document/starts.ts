import type { Store } from '../store.ts';
import { addColumn } from './edits.ts';
import { exampleScenes, exampleStudy } from './examples.ts';

/** Something to begin with, from the menu. */
export interface Start {
  readonly name: string;
  readonly title: string;
  readonly open: (store: Store) => Promise<void>;
}

/** The example study, and every example scene as a further column. */
export const pagesToStartFrom: readonly Start[] = [
  {
    name: 'study',
    title: 'The example study (invented)',
    open: async (store) => {
      const { page, files } = exampleStudy();
      store.open({ ...page, theme: store.page.peek().theme }, await fetchFiles(files));
    },
  },
  ...exampleScenes.map(({ name, title, text }): Start => ({
    name,
    title: `Add a column: ${title}`,
    open: async (store) => {
      store.edit(addColumn(name, text));
    },
  })),
];

/** The bytes behind URLs of this page. Throws where one cannot be had. */
export async function fetchFiles(urls: Readonly<Record<string, string>>): Promise<Record<string, Uint8Array>> {
  const read = async ([name, url]: [string, string]): Promise<[string, Uint8Array]> => {
    const answer = await fetch(url);
    if (!answer.ok) throw new Error(`${name} could not be read: ${answer.status}`);
    return [name, new Uint8Array(await answer.arrayBuffer())];
  };
  return Object.fromEntries(await Promise.all(Object.entries(urls).map(read)));
}
