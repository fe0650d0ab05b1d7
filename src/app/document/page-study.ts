import { parse, stringify } from 'yaml';
import { parseStudy } from '../../infer/study.ts';
import { InputError } from '../../units/input-error.ts';
import type { PageColumn, PageDocument, PageRow } from './page-document.ts';
import { withoutKey } from './without-key.ts';

/** What the page shows of a study at first: the shapes, P at the longest and shortest wavelength, RM, rings. */
export const firstRows: readonly PageRow[] = [
  { kind: 'shape' },
  { kind: 'polarization', band: 0 },
  { kind: 'polarization', band: -1 },
  { kind: 'rotation-measure' },
  { kind: 'ring', band: 0 },
  { kind: 'verdict' },
];

const look: Pick<PageDocument, 'rows' | 'shape' | 'theme'> = {
  rows: firstRows,
  shape: { turn: 0, tilt: 0, colourBy: 'strength' },
  theme: 'light',
};

/**
 * The page of a study file: one column a hypothesis, `sceneText` gives the text of a scene's file.
 * Throws InputError where the study is wrong, with its place.
 */
export function pageOfStudy(text: string, fileName: string, sceneText: (file: string) => string): PageDocument {
  parseStudy(text, fileName);
  const { hypotheses, title, ...rest } = parse(text) as StudyFile;
  const study = withoutKey(rest, 'gyrelight-study');
  const columns = hypotheses.map(({ name, scene, ...hypothesis }, k): PageColumn => ({ id: `c${k + 1}`, name, scene: sceneText(scene), hypothesis }));
  return { ...look, title: title ?? fileName, columns, chosen: columns[0].id, study };
}

/** The page of a single scene, without an observation. */
export function pageOfScene(name: string, text: string): PageDocument {
  return { ...look, title: name, columns: [{ id: 'c1', name, scene: text, hypothesis: {} }], chosen: 'c1', study: {} };
}

interface StudyFile {
  readonly title?: string;
  readonly hypotheses: readonly ({ readonly name: string; readonly scene: string } & Record<string, unknown>)[];
  readonly [key: string]: unknown;
}

/** The study file that the page stands for, as the command line reads it; scenes are named after their columns. */
export function studyText({ title, columns, study }: PageDocument): string {
  const hypotheses = columns.map(({ name, hypothesis }, k) => ({ name, scene: sceneFileName(columns, k), ...hypothesis }));
  return stringify({ 'gyrelight-study': 1, title, ...study, hypotheses }, { lineWidth: 0 });
}

/** The file name of a column's scene: its name with what file systems dislike taken out, and no two alike. */
export function sceneFileName(columns: readonly PageColumn[], index: number): string {
  const plain = (name: string): string => name.toLowerCase().replace(/[^a-z0-9]+/g, '-').replace(/^-|-$/g, '') || 'scene';
  const name = plain(columns[index].name);
  const before = columns.slice(0, index).filter((column) => plain(column.name) === name).length;
  return `${name}${before ? `-${before + 1}` : ''}.scene.yaml`;
}

/** Whether the page has an observation to hold its columns against. */
export function hasObservation({ study }: Pick<PageDocument, 'study'>): boolean {
  return Array.isArray(study.data) && study.data.length > 0;
}

/** The names of files that the study's data need. */
export function filesNeeded({ study }: Pick<PageDocument, 'study'>): readonly string[] {
  const keys = ['file', 'files', 'mask', 'noiseMap', 'sources', 'sectors', 'spectrum'];
  const entries = Array.isArray(study.data) ? (study.data as Record<string, unknown>[]) : [];
  return entries.flatMap((entry) => keys.flatMap((key) => [entry[key]].flat().filter((one): one is string => typeof one === 'string')));
}

/** Throws InputError naming a file that the data need and the page has not got. */
export function refuseMissingFiles(page: Pick<PageDocument, 'study'>, have: (file: string) => boolean): void {
  const missing = filesNeeded(page).filter((file) => !have(file));
  if (missing.length > 0) throw new InputError(`the study's data need ${missing.join(', ')}: drop ${missing.length === 1 ? 'that file' : 'those files'} here too`);
}
