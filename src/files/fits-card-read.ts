import type { Card, CardValue } from './fits-types.ts';
import { isCommentary } from './fits-card-write.ts';

const NUMBER = /^[+-]?(\d+\.?\d*|\.\d+)([EeDd][+-]?\d+)?$/;

/** One 80-character line as a card (FITS 4.0, section 4). Never throws: see `Card.malformed`. */
export function parseCard(line: string): Card {
  const keyword = line.slice(0, 8).trimEnd();
  const hasValue = line.slice(8, 10) === '= ' && !isCommentary(keyword);
  if (!hasValue) return { keyword, comment: line.slice(8).trimEnd() };
  return { keyword, ...parseValue(line.slice(10)) };
}

/** Value and comment from the text after `KEYWORD = `. */
function parseValue(text: string): Omit<Card, 'keyword'> {
  const start = text.trimStart();
  if (start.startsWith("'")) return parseString(start);
  const slash = start.indexOf('/');
  const value = (slash < 0 ? start : start.slice(0, slash)).trim();
  const comment = slash < 0 ? {} : { comment: start.slice(slash + 1).trim() };
  if (value === '') return comment;
  if (value === 'T' || value === 'F') return { value: value === 'T', ...comment };
  if (!NUMBER.test(value)) return { malformed: value, ...comment };
  const number = Number(value.replace(/[Dd]/, 'E'));
  return Number.isFinite(number) ? { value: number, ...comment } : { malformed: value, ...comment };
}

function parseString(text: string): Omit<Card, 'keyword'> {
  const match = /^'((?:[^']|'')*)'\s*(?:\/(.*))?$/.exec(text.trimEnd());
  if (match === null) return { malformed: text.trimEnd() };
  // Trailing blanks of a string mean nothing, leading ones do.
  const value = match[1].replaceAll("''", "'").trimEnd();
  return match[2] === undefined ? { value } : { value, comment: match[2].trim() };
}

/**
 * Long strings joined: a string that ends in `&` goes on in the CONTINUE cards after it (FITS 4.0,
 * section 4.2.1.2). A CONTINUE card that continues nothing stays as it is.
 */
export function joinContinued(cards: readonly Card[]): Card[] {
  const joined: Card[] = [];
  for (const card of cards) {
    const before = joined.at(-1);
    const next = card.keyword === 'CONTINUE' ? parseValue(card.comment ?? '') : undefined;
    if (typeof next?.value === 'string' && isOpen(before?.value) && before) {
      const comment = [before.comment, next.comment].filter((text) => text).join(' ');
      joined[joined.length - 1] = {
        keyword: before.keyword,
        value: before.value.slice(0, -1) + next.value,
        ...(comment === '' ? {} : { comment }),
      };
    } else {
      joined.push(card);
    }
  }
  return joined;
}

function isOpen(value: CardValue | undefined): value is string {
  return typeof value === 'string' && value.endsWith('&');
}
