import { findNumber } from './fits-header.ts';
import type { Bitpix, Card, FitsPlace } from './fits-types.ts';
import { fitsError } from './fits-types.ts';

/**
 * The physical values of an image's big-endian bytes: BZERO + BSCALE * value, NaN where an integer
 * equals BLANK. 64-bit integers beyond 2^53 are rounded to the nearest double.
 */
export function imageValues(cards: readonly Card[], bitpix: Bitpix, data: Uint8Array, place: FitsPlace): Float64Array {
  return decodeNumbers(data, bitpix, imageScaling(cards, bitpix, place));
}

/** BSCALE, BZERO and BLANK of an image. Throws InputError where BLANK is no whole number. */
export function imageScaling(cards: readonly Card[], bitpix: Bitpix, place: FitsPlace): Scaling {
  const scale = findNumber(cards, 'BSCALE', place) ?? 1;
  const zero = findNumber(cards, 'BZERO', place) ?? 0;
  // BLANK means nothing for floating point, where NaN itself is blank (FITS 4.0, section 4.4.2.5).
  const blank = bitpix > 0 ? findNumber(cards, 'BLANK', place) : undefined;
  if (blank !== undefined && !Number.isInteger(blank)) throw fitsError(place, `BLANK = ${blank}; allowed: a whole number`);
  // -2^63 is a double, its neighbours are not.
  if (blank !== undefined && !Number.isSafeInteger(blank) && blank !== -(2 ** 63)) {
    throw fitsError(place, `BLANK = ${blank} cannot be told from its neighbours; allowed: below 2^53, or -2^63`);
  }
  return { scale, zero, blank };
}

export interface Scaling {
  readonly scale: number;
  readonly zero: number;
  readonly blank?: number;
}

/** Big-endian numbers as doubles; `blank` is compared before scaling. */
export function decodeNumbers(data: Uint8Array, bitpix: Bitpix, { scale, zero, blank }: Scaling): Float64Array {
  const width = Math.abs(bitpix) / 8;
  const count = Math.floor(data.length / width);
  const values = new Float64Array(count);
  const view = new DataView(data.buffer, data.byteOffset, data.byteLength);
  if (bitpix === 8) values.set(data);
  else if (bitpix === 16) for (let i = 0; i < count; i++) values[i] = view.getInt16(2 * i);
  else if (bitpix === 32) for (let i = 0; i < count; i++) values[i] = view.getInt32(4 * i);
  else if (bitpix === 64) decodeLongs(view, values, blank, { scale, zero });
  else if (bitpix === -32) for (let i = 0; i < count; i++) values[i] = view.getFloat32(4 * i);
  else for (let i = 0; i < count; i++) values[i] = view.getFloat64(8 * i);
  if (bitpix === 64 || (scale === 1 && zero === 0 && blank === undefined)) return values;
  for (let i = 0; i < count; i++) values[i] = values[i] === blank ? NaN : zero + scale * values[i];
  return values;
}

/** Unsigned 64-bit integers are signed ones plus 2^63: added before rounding, or small ones are lost. */
function decodeLongs(view: DataView, values: Float64Array, blank: number | undefined, { scale, zero }: Scaling): void {
  const isWholeShift = scale === 1 && Number.isInteger(zero);
  const shift = isWholeShift ? BigInt(zero) : 0n;
  const blankLong = blank === undefined ? undefined : BigInt(blank);
  for (let i = 0; i < values.length; i++) {
    const long = view.getBigInt64(8 * i);
    if (long === blankLong) values[i] = NaN;
    else values[i] = isWholeShift ? Number(long + shift) : zero + scale * Number(long);
  }
}
