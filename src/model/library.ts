import { InputError, nearestHint } from '../units/input-error.ts';
import { quoteValue } from '../units/quote.ts';
import { parseModelFile } from './model-file.ts';
import type { Model, ModelKind } from './types.ts';

const texts = import.meta.glob<string>('../../models/*.yaml', { query: '?raw', import: 'default', eager: true });

/** Files of `models/` by the name of their model, sorted. */
const files: ReadonlyMap<string, string> = new Map(
  Object.keys(texts)
    .sort()
    .map((path) => [path.replace(/^.*\/|\.yaml$/g, ''), path]),
);

const parsed = new Map<string, Model>();

/**
 * Every model of `models/` by name, sorted. Throws InputError with its place where a file is not as
 * `models/README.md` says.
 */
export function modelLibrary(): ReadonlyMap<string, Model> {
  return new Map([...files.keys()].map((name) => [name, readModel(name)]));
}

/** The model of a name, of the wanted kind; read when first asked for. Throws InputError, without a place, with the nearest name. */
export function getModel(name: string, kind?: ModelKind): Model {
  if (files.has(name)) {
    const model = readModel(name);
    if (kind === undefined || model.kind === kind) return model;
    throw new InputError(`the model "${name}" is a ${model.kind}, but a ${kind} is wanted; those are ${namesOf(kind).join(', ')}`);
  }
  const names = namesOf(kind);
  throw new InputError(`unknown model ${quoteValue(name)}${nearestHint(name.slice(0, 60), names)}; models are ${names.join(', ')}`);
}

function namesOf(kind: ModelKind | undefined): string[] {
  return [...modelLibrary().values()].filter((model) => kind === undefined || model.kind === kind).map((model) => model.name);
}

function readModel(name: string): Model {
  const known = parsed.get(name);
  if (known) return known;
  const path = files.get(name) ?? '';
  const file = path.replace(/^(\.\.\/)+/, '');
  const model = parseModelFile(texts[path], file);
  if (model.name !== name) throw new InputError(`the model is named "${model.name}"; its file must have the same name`, { file });
  parsed.set(name, model);
  return model;
}
