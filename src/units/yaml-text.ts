import { Composer, Document, Parser } from 'yaml';
import type { CST, LineCounter } from 'yaml';
import { InputError } from './input-error.ts';

const MAX_TEXT = 200_000;
const MAX_DEPTH = 64;

/**
 * YAML 1.2 text → document, errors of the text still in `document.errors`. Throws InputError, with
 * the file as place, where the text is too long or nested so deeply that reading it would exhaust
 * the stack.
 */
export function composeYaml(text: string, fileName: string, lines: LineCounter): Document {
  if (text.length > MAX_TEXT) {
    throw new InputError(`the text has ${text.length} characters; at most ${MAX_TEXT} are allowed`, { file: fileName });
  }
  // The parser walks, the composer recurses: depth is checked between the two.
  const tokens = [...new Parser(lines.addNewLine).parse(text)];
  if (depthOf(tokens) > MAX_DEPTH) {
    throw new InputError(`values are nested more than ${MAX_DEPTH} deep`, { file: fileName });
  }
  const composer = new Composer({ version: '1.2', prettyErrors: false, logLevel: 'error' });
  const documents = [...composer.compose(tokens, true, text.length)];
  if (documents.length > 1) {
    throw new InputError('the file holds several YAML documents; one is allowed', { file: fileName });
  }
  return documents[0] ?? new Document(null);
}

/** The deepest nesting of values in a syntax tree, without recursion. */
function depthOf(tokens: readonly CST.Token[]): number {
  let deepest = 0;
  const open: (readonly [token: CST.Token, depth: number])[] = tokens.map((token) => [token, 0]);
  for (let next = open.pop(); next; next = open.pop()) {
    const [token, depth] = next;
    deepest = Math.max(deepest, depth);
    const children: (CST.Token | null | undefined)[] = [];
    if (token.type === 'document') children.push(token.value);
    if ('items' in token) for (const item of token.items) children.push(item.key, item.value);
    for (const child of children) if (child) open.push([child, depth + 1]);
  }
  return deepest;
}
