import { joinContinued, parseCard } from './fits-card-read.ts';
import type { Card, FitsPlace } from './fits-types.ts';
import { BLOCK_BYTES, fitsError } from './fits-types.ts';

const CARD_BYTES = 80;
const LAYOUT_KEYWORD = new RegExp(
  '^(SIMPLE|XTENSION|BITPIX|NAXIS\\d*|EXTEND|PCOUNT|GCOUNT|GROUPS|TFIELDS|THEAP|BSCALE|BZERO|BLANK|' +
    'T(TYPE|FORM|UNIT|DIM|SCAL|ZERO|NULL|DISP|BCOL)\\d+|EXTNAME|CHECKSUM|DATASUM|LONGSTRN|CONTINUE|END)$',
);

/** Does a keyword say how the data are laid out, or otherwise belong to the writer? */
export function isLayoutKeyword(keyword: string): boolean {
  return LAYOUT_KEYWORD.test(keyword);
}

/**
 * The header that begins at `start`, and the offset of the data behind it. HIERARCH cards are left
 * out. Throws InputError where END is missing or a byte is no ASCII text.
 */
export function readHeader(bytes: Uint8Array, start: number, place: FitsPlace): { cards: Card[]; end: number } {
  const cards: Card[] = [];
  for (let offset = start; offset + CARD_BYTES <= bytes.length; offset += CARD_BYTES) {
    const line = cardText(bytes, offset, (offset - start) / CARD_BYTES + 1, place);
    if (line.trimEnd() === 'END') {
      const end = start + Math.ceil((offset + CARD_BYTES - start) / BLOCK_BYTES) * BLOCK_BYTES;
      return { cards: joinContinued(cards), end };
    }
    if (!line.startsWith('HIERARCH ')) cards.push(parseCard(line));
  }
  throw fitsError(place, `the header has no END card within the ${bytes.length} bytes of the file: is it cut?`);
}

function cardText(bytes: Uint8Array, offset: number, number: number, place: FitsPlace): string {
  const line = String.fromCharCode(...bytes.subarray(offset, offset + CARD_BYTES));
  const bad = /[^ -~]/.exec(line);
  if (bad === null) return line;
  const code = line.charCodeAt(bad.index);
  throw fitsError(place, `card ${number} of the header holds byte ${code}; a header is ASCII text, bytes 32 to 126`);
}

/** The first card of a keyword, or undefined. */
export function findCard(cards: readonly Card[], keyword: string): Card | undefined {
  return cards.find((card) => card.keyword === keyword);
}

/** The number of a keyword, undefined where it is absent. Throws InputError where it is no number. */
export function findNumber(cards: readonly Card[], keyword: string, place: FitsPlace): number | undefined {
  const card = findCard(cards, keyword);
  if (card === undefined) return undefined;
  if (typeof card.value === 'number') return card.value;
  throw fitsError(place, `${keyword} = ${valueText(card)} is no number`);
}

/** The string of a keyword, undefined where it is absent. Throws InputError where it is no string. */
export function findString(cards: readonly Card[], keyword: string, place: FitsPlace): string | undefined {
  const card = findCard(cards, keyword);
  if (card === undefined) return undefined;
  if (typeof card.value === 'string') return card.value;
  throw fitsError(place, `${keyword} = ${valueText(card)} is no text in quotes`);
}

/** An integer within limits, which must be present. Throws InputError where it is not. */
export function getInteger(
  cards: readonly Card[],
  keyword: string,
  range: { readonly least: number; readonly most: number },
  place: FitsPlace,
): number {
  const value = findNumber(cards, keyword, place);
  const allowed = `allowed: a whole number ${range.least} to ${range.most}`;
  if (value === undefined) throw fitsError(place, `${keyword} is missing; ${allowed}`);
  if (Number.isInteger(value) && value >= range.least && value <= range.most) return value;
  throw fitsError(place, `${keyword} = ${value}; ${allowed}`);
}

/** The value of a card as a message shows it. */
export function valueText(card: Card): string {
  if (card.malformed !== undefined) return card.malformed;
  if (typeof card.value === 'string') return `'${card.value}'`;
  if (typeof card.value === 'boolean') return card.value ? 'T' : 'F';
  return card.value === undefined ? '(empty)' : String(card.value);
}
