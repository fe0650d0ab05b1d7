import { strToU8, zipSync } from 'fflate';
import type { Store } from '../store.ts';
import { writePageFile } from './page-file.ts';
import { save } from './save.ts';
import { lineUpSvg } from './line-up-figure.ts';
import { savePicture } from './panel-files.ts';
import { version } from '../../files/version.ts';
import { filesNeeded, sceneFileName, studyText } from './page-study.ts';
import { findFile } from '../compute/memory-files.ts';
import { findColumn } from './page-document.ts';

/** Something that can be saved from the page. */
export interface Taking {
  readonly name: string;
  readonly title: string;
  readonly take: (store: Store) => void | Promise<void>;
}

/** All that the page as a whole gives away; panels have their own. */
export const takings: readonly Taking[] = [
  {
    name: 'page',
    title: 'the page with its maps (page.json)',
    take: (store) => save('page.json', writePageFile(store.page.peek(), store.files.peek()), 'application/json'),
  },
  {
    name: 'study',
    title: 'the study with scenes and maps (study.zip)',
    take: (store) => {
      const page = store.page.peek();
      const files: Record<string, Uint8Array> = { 'study.yaml': strToU8(studyText(page)) };
      page.columns.forEach(({ scene }, k) => (files[sceneFileName(page.columns, k)] = strToU8(scene)));
      for (const file of filesNeeded(page)) {
        const bytes = findFile(store.files.peek(), file);
        if (bytes) files[file] = bytes;
      }
      save('study.zip', zipSync(files, { mtime: '2000-01-01' }), 'application/zip');
    },
  },
  {
    name: 'scene',
    title: 'the chosen column’s scene',
    take: (store) => {
      const page = store.page.peek();
      const column = findColumn(page, page.chosen);
      if (column) save(sceneFileName(page.columns, page.columns.indexOf(column)), column.scene, 'text/yaml');
    },
  },
  ...(['svg', 'png', 'pdf'] as const).map((kind): Taking => ({
    name: `line-up-${kind}`,
    title: `the line-up as one figure (${kind.toUpperCase()})`,
    take: async (store) => {
      const page = store.page.peek();
      const pictures = page.columns.map(({ id }) => store.columns.peek()[id]?.picture);
      const verdict = store.ranker.ranking.peek()?.verdict ?? '';
      const svg = lineUpSvg(page, store.observed.peek().picture, pictures, verdict);
      // What the figure is made from is the whole page.
      await savePicture('line-up', svg, kind, { sceneText: writePageFile(page, {}), version, seed: 1 });
    },
  })),
];
