import type { Card, CardValue } from './fits-types.ts';

const CARD_BYTES = 80;
/** Of a string within its quotes, in a card of its own. */
const STRING_BYTES = 68;

/**
 * The 80-character lines of one card, in fixed format (FITS 4.0, section 4.2): several for a long
 * comment or a long string (CONTINUE, section 4.2.1.2). A comment that does not fit beside its
 * value is cut. Throws RangeError for what no header can hold: those are a programmer's mistakes,
 * users' text passes through `asciiText` first.
 */
export function cardLines(card: Card): string[] {
  if (!/^[A-Z0-9_-]{0,8}$/.test(card.keyword)) throw new RangeError(`no FITS keyword: "${card.keyword}"`);
  for (const text of [card.value, card.comment]) {
    if (typeof text === 'string' && !/^[ -~]*$/.test(text)) throw new RangeError(`not ASCII in ${card.keyword}: "${text}"`);
  }
  if (card.malformed !== undefined) throw new RangeError(`${card.keyword} has a value that cannot be written`);
  if (isCommentary(card.keyword)) return commentaryLines(card.keyword, card.comment ?? '');
  const start = `${card.keyword.padEnd(8)}= `;
  if (typeof card.value === 'string') return stringLines(start, card.value, card.comment ?? '');
  const value = card.value === undefined ? '' : scalarText(card.value);
  return [withComment(start + value.padStart(20), card.comment ?? '')];
}

/** Has this keyword no value, but text alone? */
export function isCommentary(keyword: string): boolean {
  return keyword === 'COMMENT' || keyword === 'HISTORY' || keyword === '';
}

/** Text that a header can hold: line ends become blanks, what is not ASCII becomes `?`. */
export function asciiText(text: string): string {
  return text.normalize('NFKD').replace(/\p{M}/gu, '').replace(/\s+/gu, ' ').replace(/[^ -~]/gu, '?');
}

function scalarText(value: CardValue): string {
  if (typeof value !== 'number') return value ? 'T' : 'F';
  if (!Number.isFinite(value)) throw new RangeError(`a FITS header holds no ${value}`);
  return Object.is(value, -0) ? '-0.0' : String(value).toUpperCase();
}

function commentaryLines(keyword: string, text: string): string[] {
  const width = CARD_BYTES - 8;
  const pieces: string[] = [];
  let rest = text;
  while (rest.length > width) {
    const blank = rest.lastIndexOf(' ', width);
    const cut = blank > width / 2 ? blank : width;
    pieces.push(rest.slice(0, cut));
    rest = rest.slice(cut).trimStart();
  }
  pieces.push(rest);
  return pieces.map((piece) => (keyword.padEnd(8) + piece).padEnd(CARD_BYTES));
}

function stringLines(start: string, value: string, comment: string): string[] {
  const pieces = quotedPieces(value);
  return pieces.map((piece, i) => {
    const isLast = i === pieces.length - 1;
    const quoted = isLast ? `'${piece.padEnd(i === 0 ? 8 : 0)}'` : `'${piece}&'`;
    const line = (i === 0 ? start : 'CONTINUE  ') + (i === 0 ? quoted.padEnd(20) : quoted);
    return isLast ? withComment(line, comment) : line.padEnd(CARD_BYTES);
  });
}

/** The value with doubled quotes, cut so that each piece and its `&` fit, never between two quotes. */
function quotedPieces(value: string): string[] {
  const pieces: string[] = [];
  let piece = '';
  for (const character of value) {
    const quoted = character === "'" ? "''" : character;
    if (piece.length + quoted.length > STRING_BYTES - 1) {
      pieces.push(piece);
      piece = '';
    }
    piece += quoted;
  }
  // One that fills its card to the last place needs no `&`, but saves nothing either.
  pieces.push(piece);
  return pieces;
}

function withComment(line: string, comment: string): string {
  const full = comment === '' ? line : `${line} / ${comment}`;
  return full.slice(0, Math.max(CARD_BYTES, line.length)).padEnd(CARD_BYTES);
}
