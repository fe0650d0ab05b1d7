import { parse } from 'yaml';
import studyText from '../../../scenes/lantern-wheel/lantern-wheel.study.yaml?raw';
import { pageOfStudy } from './page-study.ts';
import type { PageDocument } from './page-document.ts';

const scenes = import.meta.glob<string>('../../../scenes/*/*.scene.yaml', { query: '?raw', import: 'default', eager: true });
const maps = import.meta.glob<string>('../../../scenes/lantern-wheel/observation/*.fits', { query: '?url', import: 'default', eager: true });

/** A scene to start from. */
export interface ExampleScene {
  readonly name: string;
  readonly title: string;
  readonly text: string;
}

/** Every example scene by its file's name, with its title. */
export const exampleScenes: readonly ExampleScene[] = Object.entries(scenes).map(([path, text]) => {
  const { title } = parse(text) as { title?: string };
  const name = path.replace(/^.*\/|\.scene\.yaml$/g, '');
  return { name, title: title ?? name, text };
});

/** The example study (an invented galaxy): its page, and where its maps are to be fetched. */
export function exampleStudy(): { readonly page: PageDocument; readonly files: Readonly<Record<string, string>> } {
  const read = (file: string): string => exampleScenes.find(({ name }) => `${name}.scene.yaml` === file)?.text ?? '';
  const files = Object.fromEntries(Object.entries(maps).map(([path, url]) => [path.replace(/^.*lantern-wheel\//, ''), url]));
  return { page: pageOfStudy(studyText, 'lantern-wheel.study.yaml', read), files };
}
