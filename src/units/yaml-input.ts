import { isAlias, isMap, isScalar, isSeq, LineCounter, visit, YAMLParseError } from 'yaml';
import type { Document, Node, Pair } from 'yaml';
import type { z } from 'zod';
import { InputError } from './input-error.ts';
import type { Place } from './input-error.ts';
import { quoteValue } from './quote.ts';
import { composeYaml } from './yaml-text.ts';

/** Keys and list indices from the top of a document to a value. */
export type YamlPath = readonly (string | number)[];

/** YAML text whose values remember their places, before anything is checked. */
export interface YamlInput {
  readonly fileName: string;
  readonly document: Document;
  readonly lines: LineCounter;
  /** Values and keys that came from a flag and not from the file. */
  readonly flags: Map<unknown, string>;
}

const MAX_ALIASES = 100;
const MAX_DEPTH = 40;

/**
 * Reads YAML 1.2 text. Throws InputError with file:line:column where the text is no YAML, too long
 * or too deep, holds several documents, repeats a key, or has a key that is not a plain word.
 */
export function readYaml(text: string, fileName: string): YamlInput {
  const lines = new LineCounter();
  const document = composeYaml(text, fileName, lines);
  const input: YamlInput = { fileName, document, lines, flags: new Map() };
  const [problem] = [...document.errors, ...document.warnings];
  if (problem) {
    const isDuplicate = problem instanceof YAMLParseError && problem.code === 'DUPLICATE_KEY';
    const [from] = problem.pos;
    const word = /^[^\s:,]*/.exec(text.slice(from, from + 60))?.[0] ?? '';
    const reason = isDuplicate ? `the key "${word}" is given twice` : `not valid YAML: ${problem.message}`;
    throw new InputError(reason, placeOfOffset(input, from));
  }
  visit(document, {
    Pair: (_, pair) => {
      if (isScalar(pair.key) && typeof pair.key.value === 'string') return;
      throw new InputError('a key must be a plain word', placeOfNode(input, pair.key));
    },
  });
  return input;
}

/**
 * The document as plain values. Throws InputError where aliases multiply it beyond reason, or it is
 * nested too deeply.
 */
export function plainValue(input: YamlInput): unknown {
  const value = expand(input);
  refuseDeep(value, MAX_DEPTH, input.fileName);
  return value;
}

/**
 * Checks the value at `path` of a document (by default all of it) against a schema and returns what
 * the schema makes of it. Throws InputError for the first thing that is wrong, at its place.
 */
export function checkYaml<T>(input: YamlInput, schema: z.ZodType<T>, path: YamlPath = []): T {
  const whole = plainValue(input);
  const result = schema.safeParse(valueAt(whole, path), { reportInput: true });
  if (result.success) return result.data;
  const { issues } = result.error;
  const issue = issues.find(({ code }) => code === 'unrecognized_keys') ?? issues[0];
  const full: YamlPath = [...path, ...issue.path.map((key) => (typeof key === 'number' ? key : String(key)))];
  const where = describePath(whole, full);
  const joint = where === '' ? '' : issue.message.startsWith('is ') ? ' ' : ': ';
  const reason = `${where}${joint}${issue.message}`;
  if (issue.code === 'unrecognized_keys') throw new InputError(reason, placeAt(input, full, issue.keys[0]));
  if (issue.code === 'invalid_key') throw new InputError(reason, placeAt(input, full.slice(0, -1), String(full.at(-1))));
  throw new InputError(reason, placeAt(input, full));
}

/**
 * The version of a file of this program, a whole number under `key`. Throws InputError where it is
 * missing, is another kind of file's, or is not `known`.
 */
export function checkVersion(input: YamlInput, key: string, known: number): void {
  const value = plainValue(input);
  if (!isGroup(value)) throw new InputError(`${quoteValue(value)} is given where keys are wanted, first "${key}: ${known}"`, placeAt(input, []));
  const version = value[key];
  if (version === known) return;
  const other = Object.keys(value).find((name) => name !== key && /^gyrelight(-|$)/.test(name));
  if (version === undefined) {
    const hint = other === undefined ? '' : `; this file says "${other}", so it is of another kind`;
    throw new InputError(`"${key}: ${known}" is missing${hint}`, placeAt(input, [], other));
  }
  const newer = typeof version === 'number' && version > known;
  const reason = newer ? 'is a newer file format than this version can read' : 'is no version of the file format';
  throw new InputError(`${key}: ${quoteValue(version)} ${reason} (it reads ${known})`, placeAt(input, [key]));
}

/**
 * The place of the value at `path`, or of the key `key` in it; where the path ends early, the place
 * of the nearest value above.
 */
export function placeAt(input: YamlInput, path: YamlPath, key?: string): Place {
  let node: unknown = input.document.contents;
  let flag = input.flags.get(node);
  for (const step of path) {
    const child = childOf(input.document, node, step);
    if (child === undefined || child === null) break;
    node = child;
    flag = input.flags.get(node) ?? flag;
  }
  if (key !== undefined) {
    const pair = findPair(resolveAlias(input.document, node), key);
    if (pair) {
      node = pair.key;
      flag = input.flags.get(node) ?? flag;
    }
  }
  return flag === undefined ? placeOfNode(input, node) : { flag };
}

/** A path in words, list items by their `name` or `model`: `field.halo.core`. */
function describePath(whole: unknown, path: YamlPath): string {
  let text = '';
  let value = whole;
  for (const step of path) {
    const holder = value;
    value = valueAt(holder, [step]);
    if (typeof step === 'string') text += text === '' ? step : `.${step}`;
    else {
      const name = isGroup(value) ? (value.name ?? value.model) : undefined;
      text += typeof name === 'string' && name.length < 60 ? `.${name}` : `, item ${step + 1}`;
    }
  }
  return text.replace(/, item (\d+)\./g, ', item $1, ');
}

/** The YAML node at one step below a node, aliases followed; undefined where there is none. */
export function childOf(document: Document, node: unknown, step: string | number): unknown {
  const holder = resolveAlias(document, node);
  if (typeof step === 'number') return isSeq(holder) ? holder.items[step] : undefined;
  return findPair(holder, step)?.value ?? undefined;
}

/** The node itself, or the one an alias stands for. */
function resolveAlias(document: Document, node: unknown): unknown {
  return isAlias(node) ? node.resolve(document) : node;
}

function findPair(node: unknown, key: string): Pair | undefined {
  return isMap(node) ? node.items.find((pair) => isScalar(pair.key) && pair.key.value === key) : undefined;
}

function placeOfNode(input: YamlInput, node: unknown): Place {
  const range = (node as Partial<Node> | null | undefined)?.range;
  return range ? placeOfOffset(input, range[0]) : { file: input.fileName };
}

/** The place of a character of the text, counted from 0. */
function placeOfOffset(input: YamlInput, offset: number): Place {
  const { line, col } = input.lines.linePos(offset);
  return { file: input.fileName, line: Math.max(line, 1), column: Math.max(col, 1) };
}

function valueAt(value: unknown, path: YamlPath): unknown {
  let current = value;
  for (const step of path) {
    if (typeof step === 'number') current = Array.isArray(current) ? (current as unknown[])[step] : undefined;
    else current = isGroup(current) && Object.hasOwn(current, step) ? current[step] : undefined;
  }
  return current;
}

function isGroup(value: unknown): value is Readonly<Record<string, unknown>> {
  return typeof value === 'object' && value !== null && !Array.isArray(value);
}

function refuseDeep(value: unknown, left: number, file: string): void {
  if (typeof value !== 'object' || value === null) return;
  if (left === 0) throw new InputError(`values are nested more than ${MAX_DEPTH} deep, or an alias holds itself`, { file });
  for (const child of Object.values(value)) refuseDeep(child, left - 1, file);
}

/** The document as values; the YAML reader throws errors of its own at alias bombs. */
function expand({ document, fileName }: YamlInput): unknown {
  try {
    return document.toJS({ maxAliasCount: MAX_ALIASES });
  } catch (error) {
    throw new InputError(`not valid YAML: ${(error as Error).message}`, { file: fileName });
  }
}
