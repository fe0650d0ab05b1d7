import { readFits } from '../../files/fits-read.ts';
import { skyImageFromFits } from '../../files/sky-fits-read.ts';
import { findProvenance } from '../../files/fits-scene.ts';
import { InputError } from '../../units/input-error.ts';
import type { PageFiles, Store } from '../store.ts';
import { addColumn } from './edits.ts';
import { readPageFile } from './page-file.ts';
import { readScene } from './read-scene.ts';
import { pageOfStudy } from './page-study.ts';

/**
 * Takes in files that were dropped or chosen: a page, a study with the files it names, scenes as new
 * columns, FITS maps as the observation, tables for a study's data. What cannot be used says why, and
 * the rest is taken in all the same.
 */
export async function takeIn(store: Store, given: readonly File[]): Promise<void> {
  const files: Record<string, Uint8Array> = {};
  for (const file of given) files[file.name] = new Uint8Array(await file.arrayBuffer());
  const said: string[] = [];
  const attempt = (name: string, work: () => string): void => {
    try {
      said.push(work());
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      said.push(`${name} cannot be used: ${error.reason}${error.place?.line ? ` (line ${error.place.line})` : ''}`);
    }
  };
  const text = (name: string): string => new TextDecoder().decode(files[name]);
  const names = Object.keys(files);
  const texts = names.filter((name) => /\.(ya?ml|json)$/i.test(name));
  const maps = names.filter((name) => /\.(fits?|fts)(\.gz)?$/i.test(name));
  const tables = names.filter((name) => /\.(csv|ecsv|txt|npy)$/i.test(name));
  const known: PageFiles = { ...store.files.peek(), ...files };

  const page = texts.find((name) => /\.json$/i.test(name));
  const study = texts.find((name) => /^\s*gyrelight-study\s*:/m.test(text(name)));
  if (page) {
    attempt(page, () => {
      const read = readPageFile(text(page), page);
      store.open(read.page, { ...read.files, ...files });
      return `Opened the page "${read.page.title}".`;
    });
  } else if (study) {
    attempt(study, () => {
      const opened = pageOfStudy(text(study), study, (scene) => sceneOf(known, scene));
      store.open({ ...opened, theme: store.page.peek().theme }, files);
      return `Opened the study "${opened.title}".`;
    });
  }
  for (const name of texts.filter((one) => one !== page && one !== study && !page && !study)) {
    attempt(name, () => {
      const { scene, error } = readScene(text(name), name, known);
      if (!scene) throw error;
      store.edit(addColumn(scene.title || name.replace(/\.scene\.ya?ml$/i, ''), text(name)));
      return `Added ${name} as a column.`;
    });
  }
  if (!page && !study && maps.length > 0) attempt(maps.join(', '), () => observationOf(store, maps, files));
  if (tables.length > 0 && !page && !study) {
    store.addFiles(Object.fromEntries(tables.map((name) => [name, files[name]])));
    said.push(`Kept ${tables.join(', ')} for a study's data.`);
  }
  for (const name of names) {
    if (![...texts, ...maps, ...tables].includes(name)) said.push(`${name} cannot be used: it is no FITS map, table, scene, study or page.`);
  }
  store.note.value = said.join(' ');
}

function sceneOf(files: PageFiles, file: string): string {
  const last = file.replace(/^.*[/\\]/, '');
  const found = files[file] ?? files[last];
  if (!found) throw new InputError(`the study needs the scene ${file}: drop it together with the study`);
  return new TextDecoder().decode(found);
}

/** Makes maps the observation: one entry of data for each Stokes parameter they hold; a scene inside one becomes a column. */
function observationOf(store: Store, names: readonly string[], files: PageFiles): string {
  const entries: Record<string, unknown>[] = [];
  const refused: string[] = [];
  const used = new Set<string>();
  let isWithoutNoise = false;
  for (const name of names) {
    try {
      const image = skyImageFromFits(readFits(files[name], name), name);
      const stokes = image.stokes.filter((one): one is 'I' | 'Q' | 'U' => one === 'I' || one === 'Q' || one === 'U');
      if (stokes.length === 0) {
        refused.push(`${name} does not say which Stokes parameter it shows: name it in a study (quantity: Q, U, I, P, chi or RM).`);
        continue;
      }
      const noise = image.noise?.[0];
      used.add(name);
      isWithoutNoise ||= !(noise !== undefined && noise > 0);
      for (const quantity of stokes) entries.push({ quantity, file: name, ...(noise !== undefined && noise > 0 && { noise: `${noise} ${image.unit}` }) });
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      refused.push(`${name} cannot be used: ${error.reason}.`);
    }
  }
  if (entries.length === 0) throw new InputError(refused.join(' ') || 'there is no map in it');
  const maps = [...used];
  store.addFiles(Object.fromEntries(maps.map((name) => [name, files[name]])));
  store.edit((page) => ({ ...page, study: { ...page.study, data: entries } }));
  const scenes = maps.flatMap((name) => sceneInside(files[name], name));
  return [
    `${entries.length} map${entries.length === 1 ? '' : 's'} in ${maps.length} file${maps.length === 1 ? '' : 's'} are the observation now.`,
    ...(isWithoutNoise ? ['No noise is stated in some: write it in the observation’s text, such as noise: 20 uJy/beam.'] : []),
    ...(scenes.length > 0 ? ['They carry the scene that they were made from.'] : []),
    ...refused,
  ].join(' ');
}

function sceneInside(bytes: Uint8Array, name: string): string[] {
  const found = findProvenance(readFits(bytes, name), name);
  return found ? [found.sceneText] : [];
}
