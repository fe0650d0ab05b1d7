import { nearestHint } from '../units/input-error.ts';
import { findNumber, findString, getInteger } from './fits-header.ts';
import { decodeNumbers } from './fits-image-read.ts';
import type { Bitpix, Card, FitsPlace, TableColumn, TableHdu } from './fits-types.ts';
import { fitsError } from './fits-types.ts';

/** Bytes of one element by the letter of TFORM (FITS 4.0, table 18); X counts bits. */
const ELEMENT_BYTES: Readonly<Record<string, number>> = {
  L: 1, X: 1 / 8, B: 1, I: 2, J: 4, K: 8, A: 1, E: 4, D: 8, C: 8, M: 16, P: 8, Q: 16,
};
const BITPIX_OF_LETTER: Readonly<Record<string, Bitpix>> = { B: 8, I: 16, J: 32, K: 64, E: -32, D: -64 };

/** A column to write: texts (ASCII, trailing blanks lost), or numbers, `repeat` of them in each row. */
export type NewColumn =
  | { readonly name: string; readonly texts: readonly string[] }
  | {
      readonly name: string;
      readonly unit?: string;
      /** D: doubles; J: 32-bit integers. */
      readonly letter: 'D' | 'J';
      readonly numbers: ArrayLike<number>;
      readonly repeat?: number;
      /** TDIM, first axis fastest, where the numbers of a row are an array. */
      readonly dimensions?: readonly number[];
    };

/** A binary table to write. Throws RangeError where columns differ in their rows or hold what their type cannot. */
export function makeTable(name: string, newColumns: readonly NewColumn[], cards: readonly Card[] = []): TableHdu {
  let byteOffset = 0;
  const columns = newColumns.map((column): TableColumn => {
    const isText = 'texts' in column;
    // A width of zero is legal, but not every reader takes it.
    const width = isText ? column.texts.reduce((most, text) => Math.max(most, text.length), 1) : (column.repeat ?? 1);
    const letter = isText ? 'A' : column.letter;
    const unit = isText ? '' : (column.unit ?? '');
    const dimensions = isText ? [] : (column.dimensions ?? []);
    const described = { name: column.name, unit, repeat: width, letter, dimensions, byteOffset, scale: 1, zero: 0 };
    byteOffset += width * ELEMENT_BYTES[letter];
    return described;
  });
  const rowCounts = newColumns.map((column, i) =>
    'texts' in column ? column.texts.length : column.numbers.length / columns[i].repeat,
  );
  const rowCount = rowCounts[0] ?? 0;
  if (rowCounts.some((count) => count !== rowCount)) throw new RangeError(`columns of ${rowCounts.join(', ')} rows`);
  const rows = new Uint8Array(byteOffset * rowCount);
  newColumns.forEach((column, i) => encodeColumn(rows, byteOffset, columns[i], column));
  return { kind: 'table', name, cards, notes: [], columns, rowBytes: byteOffset, rowCount, rows };
}

function encodeColumn(rows: Uint8Array, rowBytes: number, column: TableColumn, source: NewColumn): void {
  const view = new DataView(rows.buffer);
  const count = 'texts' in source ? source.texts.length : source.numbers.length;
  for (let i = 0; i < count; i++) {
    if ('texts' in source) {
      const text = source.texts[i];
      if (!/^[ -~]*$/.test(text)) throw new RangeError(`not ASCII in column ${column.name}: "${text}"`);
      const start = i * rowBytes + column.byteOffset;
      for (let k = 0; k < column.repeat; k++) rows[start + k] = k < text.length ? text.charCodeAt(k) : 32;
      continue;
    }
    const row = Math.floor(i / column.repeat);
    const start = row * rowBytes + column.byteOffset + (i % column.repeat) * ELEMENT_BYTES[column.letter];
    const number = source.numbers[i];
    if (source.letter === 'D') view.setFloat64(start, number);
    else if (number === (number | 0)) view.setInt32(start, number);
    else throw new RangeError(`column ${column.name} holds 32-bit integers, not ${number}`);
  }
}

/** The columns that a table's header describes. Throws InputError where they do not fill its rows. */
export function tableColumns(cards: readonly Card[], rowBytes: number, place: FitsPlace): TableColumn[] {
  let byteOffset = 0;
  const fields = getInteger(cards, 'TFIELDS', { least: 0, most: 999 }, place);
  const columns = Array.from({ length: fields }, (_, index): TableColumn => {
    const n = index + 1;
    const form = findString(cards, `TFORM${n}`, place);
    const match = /^(\d*)([LXBIJKAEDCMPQ])/.exec(form ?? '');
    if (match === null) throw fitsError(place, `TFORM${n} = '${form ?? ''}' is no format of a binary table`);
    const repeat = match[1] === '' ? 1 : Number(match[1]);
    const column = {
      name: findString(cards, `TTYPE${n}`, place) ?? '',
      unit: findString(cards, `TUNIT${n}`, place) ?? '',
      repeat,
      letter: match[2],
      dimensions: dimensionsOf(findString(cards, `TDIM${n}`, place), n, place),
      byteOffset,
      scale: findNumber(cards, `TSCAL${n}`, place) ?? 1,
      zero: findNumber(cards, `TZERO${n}`, place) ?? 0,
      blank: findNumber(cards, `TNULL${n}`, place),
    };
    byteOffset += Math.ceil(repeat * ELEMENT_BYTES[match[2]]);
    return column;
  });
  if (byteOffset === rowBytes) return columns;
  throw fitsError(place, `the columns need ${byteOffset} bytes a row, but NAXIS1 = ${rowBytes}`);
}

function dimensionsOf(text: string | undefined, n: number, place: FitsPlace): number[] {
  if (text === undefined) return [];
  const match = /^\(\s*(\d+(?:\s*,\s*\d+)*)\s*\)$/.exec(text.trim());
  if (match === null) throw fitsError(place, `TDIM${n} = '${text}' is no list such as (1,32)`);
  return match[1].split(',').map(Number);
}

/** The column of this name, in any case. Throws InputError where the table has none. */
export function getColumn(table: TableHdu, name: string, place: FitsPlace): TableColumn {
  const found = table.columns.find((column) => column.name.toUpperCase() === name.toUpperCase());
  if (found) return found;
  const names = table.columns.map((column) => column.name);
  throw fitsError(place, `no column ${name}${nearestHint(name, names)}; there are: ${names.join(', ') || 'none'}`);
}

/** A numeric column as [row * repeat + element]; TSCAL, TZERO and TNULL applied. Throws InputError where it is not numeric. */
export function tableNumbers(table: TableHdu, name: string, place: FitsPlace): Float64Array {
  const column = getColumn(table, name, place);
  const bitpix = BITPIX_OF_LETTER[column.letter];
  if (bitpix === undefined) throw fitsError(place, `column ${name} has format ${column.letter}; numbers are B, I, J, K, E or D`);
  const blank = bitpix > 0 ? column.blank : undefined;
  if (blank !== undefined && !Number.isInteger(blank)) throw fitsError(place, `column ${name}: TNULL = ${blank} is no whole number`);
  return decodeNumbers(columnBytes(table, column, Math.abs(bitpix) / 8), bitpix, { ...column, blank });
}

/** A text column, one string per row, trailing blanks cut. Throws InputError where it holds no ASCII text. */
export function tableTexts(table: TableHdu, name: string, place: FitsPlace): string[] {
  const column = getColumn(table, name, place);
  if (column.letter !== 'A') throw fitsError(place, `column ${name} has format ${column.letter}; text is A`);
  const bytes = columnBytes(table, column, 1);
  return Array.from({ length: table.rowCount }, (_, row) => {
    const cell = bytes.subarray(row * column.repeat, (row + 1) * column.repeat);
    // A zero byte ends a string before its width does.
    const end = cell.indexOf(0);
    const text = Array.from(end < 0 ? cell : cell.subarray(0, end), (byte) => String.fromCharCode(byte)).join('');
    if (!/^[ -~]*$/.test(text)) throw fitsError(place, `column ${name}, row ${row + 1} is no ASCII text`);
    return text.trimEnd();
  });
}

/** The bytes of one column, row after row. */
function columnBytes(table: TableHdu, column: TableColumn, elementBytes: number): Uint8Array {
  const width = column.repeat * elementBytes;
  const bytes = new Uint8Array(width * table.rowCount);
  for (let row = 0; row < table.rowCount; row++) {
    const start = row * table.rowBytes + column.byteOffset;
    bytes.set(table.rows.subarray(start, start + width), row * width);
  }
  return bytes;
}
