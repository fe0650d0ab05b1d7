import { isMap, isSeq, isScalar, Pair, Scalar, visit, YAMLMap } from 'yaml';
import type { Node } from 'yaml';
import { InputError, nearestHint } from '../units/input-error.ts';
import { quoteValue } from '../units/quote.ts';
import { plainValue, readYaml } from '../units/yaml-input.ts';
import type { YamlInput } from '../units/yaml-input.ts';

/** A value that takes the place of one in the file before the file is checked. */
export interface Override {
  /** `field.halo.strength`: keys, items of lists by their `name` (or `model`, where unnamed). */
  readonly path: string;
  /** YAML text: "3 uG", "odd", "[64, 32]". */
  readonly value: string;
  /** As the user gave it, for messages: `--set field.halo.strength=3 uG`. */
  readonly flag: string;
}

/**
 * Changes the document: sets the value at each override's path, adding keys that are missing.
 * Throws InputError placed at the flag where a list has no item of the name, or several.
 */
export function applyOverrides(input: YamlInput, overrides: readonly Override[]): void {
  if (overrides.length === 0) return;
  plainValue(input);
  expandAliases(input);
  for (const override of overrides) applyOverride(input, override);
}

/** Afterwards a change in one place stays in that place. */
function expandAliases({ document }: YamlInput): void {
  visit(document, {
    Alias: (_, alias) => {
      const original = alias.resolve(document);
      if (!original) return undefined;
      const copy = original.clone() as typeof original;
      delete copy.anchor;
      return copy;
    },
  });
}

function applyOverride(input: YamlInput, { path, value, flag }: Override): void {
  const fail = (reason: string): never => {
    throw new InputError(reason, { flag });
  };
  const keys = path.split('.').map((key) => key.trim());
  if (keys.some((key) => key === '')) fail(`"${path}" is no path: names joined by single dots are wanted, such as galaxy.inclination`);
  const node = readValue(value, flag);
  let holder: unknown = input.document.contents;
  keys.forEach((key, depth) => {
    const last = depth === keys.length - 1;
    const soFar = keys.slice(0, depth).join('.') || 'the file';
    if (isSeq(holder)) {
      const index = itemNamed(holder.items, key, soFar, fail);
      if (last) holder.items[index] = node;
      else holder = holder.items[index];
      return;
    }
    if (!isMap(holder)) return fail(`${soFar} is a single value and has no "${key}"`);
    const map: YAMLMap = holder;
    const list = map.get('layers', true);
    const inner = map.get('parameters', true);
    if (map.has(key)) {
      if (last) map.set(key, node);
      else holder = map.get(key, true);
    } else if (!last && isSeq(list)) {
      holder = list.items[itemNamed(list.items, key, soFar, fail)];
    } else if (last && isMap(inner) && inner.has(key)) {
      inner.set(key, node);
    } else {
      const added = new Scalar(key);
      input.flags.set(added, flag);
      const child = last ? node : new YAMLMap();
      map.items.push(new Pair(added, child));
      input.flags.set(child, flag);
      holder = child;
    }
  });
  visit(node, (_, child) => void input.flags.set(child, flag));
}

function itemNamed(items: readonly unknown[], key: string, soFar: string, fail: (reason: string) => never): number {
  const names = items.map((item) => {
    const name = isMap(item) ? (item.get('name') ?? item.get('model')) : undefined;
    return typeof name === 'string' ? name : '';
  });
  const found = names.flatMap((name, index) => (name === key ? [index] : []));
  if (found.length === 1) return found[0];
  if (found.length > 1) return fail(`"${key}" fits ${found.length} items of ${soFar}: give them different names`);
  const known = names.filter((name) => name !== '');
  return fail(`${soFar} has nothing named ${quoteValue(key)}${nearestHint(key.slice(0, 60), known)}; it has ${known.join(', ') || 'no items'}`);
}

function readValue(text: string, flag: string): Node {
  const input = placed(flag, () => readYaml(text, ''));
  const node = input.document.contents;
  if (node === null || (isScalar(node) && node.value === null)) throw new InputError('there is no value after =', { flag });
  placed(flag, () => plainValue(input));
  visit(node, { Alias: () => { throw new InputError(`${quoteValue(text)} is not allowed: aliases have no use here`, { flag }); } });
  return node;
}

/** Errors of a flag's value are placed at the flag. */
function placed<T>(flag: string, compute: () => T): T {
  try {
    return compute();
  } catch (error) {
    throw error instanceof InputError ? new InputError(error.reason, { flag }) : error;
  }
}
