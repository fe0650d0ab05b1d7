import { cardLines } from './fits-card-write.ts';
import { checksumText, onesComplementSum } from './fits-checksum.ts';
import { isLayoutKeyword } from './fits-header.ts';
import type { Bitpix, Card, ImageHdu, TableHdu } from './fits-types.ts';
import { blockedLength } from './fits-types.ts';

const NO_CHECKSUM = '0'.repeat(16);

/** An image to write. `values` run in the order of `shape`, its first axis fastest; NaN is blank. */
export function makeImage(
  shape: readonly number[],
  values: Float64Array,
  bitpix: -32 | -64,
  cards: readonly Card[] = [],
  name = '',
): ImageHdu {
  return { kind: 'image', name, cards, notes: [], bitpix, shape, values };
}

/** A primary unit without data, before tables. */
export function emptyPrimary(cards: readonly Card[] = []): ImageHdu {
  return { kind: 'image', name: '', cards, notes: [], bitpix: 8, shape: [], values: new Float64Array(0) };
}

/**
 * The bytes of a FITS file (standard 4.0) of a primary image and extensions, with CHECKSUM and
 * DATASUM in each unit. Throws RangeError for what the format cannot hold: a table in the first
 * place, integer images, non-ASCII cards, cards that belong to the layout.
 */
export function writeFits(hdus: readonly (ImageHdu | TableHdu)[]): Uint8Array {
  if (hdus[0]?.kind !== 'image') throw new RangeError('a FITS file begins with an image');
  const units = hdus.map((hdu, index) => unitBytes(hdu, index === 0));
  const file = new Uint8Array(units.reduce((sum, { header, data }) => sum + header.length + data.length, 0));
  let offset = 0;
  for (const { header, data } of units) {
    file.set(header, offset);
    file.set(data, offset + header.length);
    offset += header.length + data.length;
  }
  return file;
}

/**
 * The header of a primary image whose data are written elsewhere, bit by bit: `dataSum` is their
 * ones'-complement sum, fill included. Its length does not depend on the sum.
 */
export function imageHeaderBytes(hdu: ImageHdu, dataSum: number): Uint8Array {
  return finishedHeader(hdu, true, dataSum);
}

/** The bytes of extensions, to follow a primary image. */
export function extensionBytes(tables: readonly TableHdu[]): Uint8Array[] {
  return tables.flatMap((table) => Object.values(unitBytes(table, false)));
}

interface UnitBytes {
  readonly header: Uint8Array;
  readonly data: Uint8Array;
}

function unitBytes(hdu: ImageHdu | TableHdu, isPrimary: boolean): UnitBytes {
  const data = hdu.kind === 'image' ? imageBytes(hdu) : tableBytes(hdu);
  return { header: finishedHeader(hdu, isPrimary, onesComplementSum(data)), data };
}

function finishedHeader(hdu: ImageHdu | TableHdu, isPrimary: boolean, dataSum: number): Uint8Array {
  const ownCards = hdu.cards.filter((card) => isLayoutKeyword(card.keyword));
  if (ownCards.length > 0) throw new RangeError(`the writer makes ${ownCards[0].keyword} itself`);
  const headerWith = (checksum: string): Uint8Array =>
    headerBytes([
      ...(hdu.kind === 'image' ? imageLayout(hdu, isPrimary) : tableLayout(hdu)),
      ...(hdu.name === '' ? [] : [{ keyword: 'EXTNAME', value: hdu.name }]),
      ...hdu.cards,
      { keyword: 'CHECKSUM', value: checksum, comment: 'of this whole unit' },
      { keyword: 'DATASUM', value: String(dataSum), comment: 'of its data' },
    ]);
  const sum = onesComplementSum(headerWith(NO_CHECKSUM), dataSum);
  return headerWith(checksumText(sum));
}

function imageLayout(hdu: ImageHdu, isPrimary: boolean): Card[] {
  return [
    isPrimary
      ? { keyword: 'SIMPLE', value: true, comment: 'FITS standard 4.0' }
      : { keyword: 'XTENSION', value: 'IMAGE', comment: 'image extension' },
    { keyword: 'BITPIX', value: hdu.bitpix, comment: bitpixComment(hdu.bitpix) },
    { keyword: 'NAXIS', value: hdu.shape.length },
    ...hdu.shape.map((value, axis) => ({ keyword: `NAXIS${axis + 1}`, value })),
    ...(isPrimary
      ? [{ keyword: 'EXTEND', value: true, comment: 'extensions may follow' }]
      : [
          { keyword: 'PCOUNT', value: 0 },
          { keyword: 'GCOUNT', value: 1 },
        ]),
  ];
}

function bitpixComment(bitpix: Bitpix): string {
  return bitpix < 0 ? `IEEE ${-bitpix}-bit floating point` : 'no data';
}

function tableLayout(hdu: TableHdu): Card[] {
  return [
    { keyword: 'XTENSION', value: 'BINTABLE', comment: 'binary table' },
    { keyword: 'BITPIX', value: 8 },
    { keyword: 'NAXIS', value: 2 },
    { keyword: 'NAXIS1', value: hdu.rowBytes, comment: 'bytes of a row' },
    { keyword: 'NAXIS2', value: hdu.rowCount, comment: 'rows' },
    { keyword: 'PCOUNT', value: 0 },
    { keyword: 'GCOUNT', value: 1 },
    { keyword: 'TFIELDS', value: hdu.columns.length, comment: 'columns' },
    ...hdu.columns.flatMap((column, index) => {
      const n = index + 1;
      const cards: Card[] = [
        { keyword: `TTYPE${n}`, value: column.name },
        { keyword: `TFORM${n}`, value: `${column.repeat}${column.letter}` },
      ];
      if (column.unit !== '') cards.push({ keyword: `TUNIT${n}`, value: column.unit });
      if (column.dimensions.length > 0) cards.push({ keyword: `TDIM${n}`, value: `(${column.dimensions.join(',')})` });
      return cards;
    }),
  ];
}

function headerBytes(cards: readonly Card[]): Uint8Array {
  const lines = cards.map(cardLines);
  // The standard does without this card; checkers of older habits warn where it is missing.
  if (lines.some((card, i) => card.length > 1 && typeof cards[i].value === 'string')) {
    lines.push(cardLines({ keyword: 'LONGSTRN', value: 'OGIP 1.0', comment: 'long strings use CONTINUE' }));
  }
  const text = `${lines.flat().join('')}${'END'.padEnd(80)}`;
  return new TextEncoder().encode(text.padEnd(blockedLength(text.length)));
}

function imageBytes(hdu: ImageHdu): Uint8Array {
  const count = hdu.shape.length === 0 ? 0 : hdu.shape.reduce((product, n) => product * n, 1);
  if (count !== hdu.values.length) throw new RangeError(`${hdu.values.length} values for shape ${hdu.shape.join(' x ')}`);
  if (count > 0 && hdu.bitpix > 0) throw new RangeError(`images are written as -32 or -64, not ${hdu.bitpix}`);
  const valueBytes = Math.abs(hdu.bitpix) / 8;
  const data = new Uint8Array(blockedLength(count * valueBytes));
  const view = new DataView(data.buffer);
  if (hdu.bitpix === -32) for (let i = 0; i < count; i++) view.setFloat32(4 * i, hdu.values[i]);
  else for (let i = 0; i < count; i++) view.setFloat64(8 * i, hdu.values[i]);
  return data;
}

function tableBytes(hdu: TableHdu): Uint8Array {
  const data = new Uint8Array(blockedLength(hdu.rowBytes * hdu.rowCount));
  data.set(hdu.rows);
  return data;
}
