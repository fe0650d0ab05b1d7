import { gunzip, isGzip } from './gunzip.ts';
import { onesComplementSum } from './fits-checksum.ts';
import { findCard, findString, getInteger, isLayoutKeyword, readHeader, valueText } from './fits-header.ts';
import { imageValues } from './fits-image-read.ts';
import { tableColumns } from './fits-table.ts';
import type { Bitpix, Card, FitsHdu, FitsPlace, ImageHdu } from './fits-types.ts';
import { blockedLength, fitsError, fitsPlace } from './fits-types.ts';
import { InputError } from '../units/input-error.ts';

const BITPIX: readonly number[] = [8, 16, 32, 64, -32, -64];
const AXES = { least: 0, most: 999 };
const LENGTH = { least: 0, most: Number.MAX_SAFE_INTEGER };

/**
 * Every header-data unit of a FITS file (standard 4.0), plain or packed by gzip. Throws InputError
 * naming file, HDU, keyword and value where the file is cut, is no FITS, or holds what is not read:
 * tile-compressed images and random groups.
 */
export function readFits(bytes: Uint8Array, fileName: string): FitsHdu[] {
  const plain = isGzip(bytes) ? gunzip(bytes, fileName) : bytes;
  checkStart(plain, fileName);
  return readUnits(plain, fileName, 0);
}

/**
 * The units of a part of a file that begins with unit number `first`: all of it for 0, else extensions.
 * Throws InputError as `readFits` does.
 */
export function readUnits(bytes: Uint8Array, fileName: string, first: number): FitsHdu[] {
  const hdus: FitsHdu[] = [];
  let offset = 0;
  while (offset < bytes.length && !isFill(bytes, offset, fileName, first + hdus.length)) {
    const { hdu, end } = readUnit(bytes, offset, fileName, first + hdus.length);
    hdus.push(hdu);
    offset = end;
  }
  return hdus;
}

/** The first unit of a file from its first bytes: an image without its values, and where they begin and end. */
export function readFirstHeader(bytes: Uint8Array, fileName: string): { hdu: ImageHdu; dataStart: number; dataEnd: number } {
  checkStart(bytes, fileName);
  const place = fitsPlace(fileName, 0);
  const { cards, end } = readHeader(bytes, 0, place);
  const { bitpix, shape } = sizesOf(cards, place);
  const count = shape.length === 0 ? 0 : shape.reduce((product, n) => product * n, 1);
  const hdu: ImageHdu = { kind: 'image', name: '', notes: [], bitpix, shape, values: new Float64Array(0), cards: cards.filter((card) => !isLayoutKeyword(card.keyword)) };
  return { hdu, dataStart: end, dataEnd: end + blockedLength((Math.abs(bitpix) / 8) * count) };
}

function sizesOf(cards: readonly Card[], place: FitsPlace): { bitpix: Bitpix; shape: number[] } {
  const bitpix = getInteger(cards, 'BITPIX', { least: -64, most: 64 }, place);
  if (!BITPIX.includes(bitpix)) throw fitsError(place, `BITPIX = ${bitpix}; allowed: ${BITPIX.join(', ')}`);
  const shape = Array.from({ length: getInteger(cards, 'NAXIS', AXES, place) }, (_, axis) => getInteger(cards, `NAXIS${axis + 1}`, LENGTH, place));
  return { bitpix: bitpix as Bitpix, shape };
}

function checkStart(bytes: Uint8Array, file: string): void {
  const start = asciiAt(bytes, 0, 30);
  if (/^SIMPLE {2}= +T/.test(start)) return;
  if (/^SIMPLE {2}= +F/.test(start)) throw new InputError('SIMPLE = F: the file says that it does not follow the FITS standard', { file });
  const given = bytes.length === 0 ? 'it is empty' : `it begins with ${JSON.stringify(start.slice(0, 10))}`;
  throw new InputError(`not a FITS file: ${given}, a FITS file with "SIMPLE  = "`, { file });
}

/** Is there nothing but fill behind the last unit? Anything else that is no extension is an error. */
function isFill(bytes: Uint8Array, offset: number, file: string, index: number): boolean {
  if (offset === 0 || asciiAt(bytes, offset, 8) === 'XTENSION') return false;
  if (bytes.subarray(offset).every((byte) => byte === 0 || byte === 32)) return true;
  throw fitsError(fitsPlace(file, index), `byte ${offset} begins no extension: expected XTENSION`);
}

function asciiAt(bytes: Uint8Array, offset: number, count: number): string {
  return String.fromCharCode(...bytes.subarray(offset, offset + count));
}

function readUnit(bytes: Uint8Array, start: number, file: string, index: number): { hdu: FitsHdu; end: number } {
  // Read header and sizes.
  const { cards: allCards, end: dataStart } = readHeader(bytes, start, fitsPlace(file, index));
  const name = findString(allCards, 'EXTNAME', fitsPlace(file, index)) ?? '';
  const place = fitsPlace(file, index, name);
  const type = index === 0 ? 'IMAGE' : (findString(allCards, 'XTENSION', place) ?? '');
  refuseUnread(allCards, type, place);
  const { bitpix, shape } = sizesOf(allCards, place);
  const extra = index === 0 ? 0 : getInteger(allCards, 'PCOUNT', LENGTH, place);
  if (index > 0) getInteger(allCards, 'GCOUNT', { least: 1, most: 1 }, place);

  // Cut the data out.
  const count = shape.length === 0 ? 0 : shape.reduce((product, n) => product * n, 1);
  const byteCount = (Math.abs(bitpix) / 8) * (count + extra);
  if (dataStart + byteCount > bytes.length) {
    const axes = shape.map((n, axis) => `NAXIS${axis + 1} = ${n}`).join(', ');
    const held = Math.max(0, bytes.length - dataStart);
    throw fitsError(place, `BITPIX = ${bitpix}, ${axes} need ${byteCount} bytes of data, but the file holds ${held}: is it cut?`);
  }
  const end = Math.min(bytes.length, dataStart + blockedLength(byteCount));
  const notes = checksumNotes(allCards, bytes.subarray(dataStart, end), place);
  const common = { name, notes, cards: allCards.filter((card) => !isLayoutKeyword(card.keyword)) };
  const data = bytes.subarray(dataStart, dataStart + byteCount);

  // Decode them.
  if (type === 'IMAGE') {
    const values = imageValues(allCards, bitpix as Bitpix, data.subarray(0, (Math.abs(bitpix) / 8) * count), place);
    return { hdu: { ...common, kind: 'image', bitpix: bitpix as Bitpix, shape, values }, end };
  }
  if (type !== 'BINTABLE') return { hdu: { ...common, kind: 'other', type }, end };
  if (shape.length !== 2) throw fitsError(place, `NAXIS = ${shape.length}; a binary table has 2 axes`);
  if (bitpix !== 8) throw fitsError(place, `BITPIX = ${bitpix}; a binary table has 8`);
  const [rowBytes, rowCount] = shape;
  if (rowBytes === 0 && rowCount > 0) throw fitsError(place, `NAXIS1 = 0, NAXIS2 = ${rowCount}: rows without bytes`);
  const columns = tableColumns(allCards, rowBytes, place);
  return { hdu: { ...common, kind: 'table', columns, rowBytes, rowCount, rows: data.subarray(0, count) }, end };
}

function refuseUnread(cards: readonly Card[], type: string, place: FitsPlace): void {
  if (findCard(cards, 'ZIMAGE')?.value === true || type === 'COMPRESSED_IMAGE') {
    throw fitsError(place, 'ZIMAGE = T: a tile-compressed image, which is not read; unpack the file first');
  }
  if (findCard(cards, 'GROUPS')?.value === true && findCard(cards, 'NAXIS1')?.value === 0) {
    throw fitsError(place, 'GROUPS = T: random groups (visibilities), not an image');
  }
}

function checksumNotes(cards: readonly Card[], data: Uint8Array, place: FitsPlace): string[] {
  const card = findCard(cards, 'DATASUM');
  if (card === undefined || card.value === '' || data.length % 4 !== 0) return [];
  const sum = onesComplementSum(data);
  if (Number(card.value) === sum) return [];
  return [`${place.hdu}: DATASUM = ${valueText(card)}, but the data sum to ${sum}: they were changed or damaged`];
}

