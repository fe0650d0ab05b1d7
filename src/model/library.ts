import { InputError, nearestHint } from '../units/input-error.ts';
import { quoteValue } from '../units/quote.ts';
import { parseModelFile } from './model-file.ts';
import type { Model, ModelKind } from './types.ts';

const texts = import.meta.glob<string>('../../models/*.yaml', { query: '?raw', import: 'default', eager: true });

let library: ReadonlyMap<string, Model> | undefined;

/**
 * Every model of `models/` by name, sorted. Read once, when first asked for. Throws InputError with
 * its place where a file is not as `models/README.md` says.
 */
export function modelLibrary(): ReadonlyMap<string, Model> {
  library ??= new Map(
    Object.keys(texts)
      .sort()
      .map((path) => parseModelFile(texts[path], path.replace(/^(\.\.\/)+/, '')))
      .map((model) => [model.name, model]),
  );
  return library;
}

/** The model of a name, of the wanted kind. Throws InputError, without a place, with the nearest name. */
export function getModel(name: string, kind?: ModelKind): Model {
  const names = [...modelLibrary().values()].filter((model) => kind === undefined || model.kind === kind).map((model) => model.name);
  const model = modelLibrary().get(name);
  if (model === undefined) {
    throw new InputError(`unknown model ${quoteValue(name)}${nearestHint(name.slice(0, 60), names)}; models are ${names.join(', ')}`);
  }
  if (kind !== undefined && model.kind !== kind) {
    throw new InputError(`the model "${name}" is a ${model.kind}, but a ${kind} is wanted; those are ${names.join(', ')}`);
  }
  return model;
}
