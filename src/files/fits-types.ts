import { InputError } from '../units/input-error.ts';

export type CardValue = string | number | boolean;

/**
 * One line of a FITS header. COMMENT, HISTORY and blank cards have a comment only. A card whose
 * value could not be understood has `malformed`: it is an error only for those who ask for it.
 */
export interface Card {
  readonly keyword: string;
  readonly value?: CardValue;
  readonly comment?: string;
  readonly malformed?: string;
}

interface HduBase {
  /** EXTNAME; empty where there is none. */
  readonly name: string;
  /** All cards but those that say how the data are laid out, which the writer makes itself. */
  readonly cards: readonly Card[];
  /** What a user should hear about this unit, such as a checksum that does not fit. */
  readonly notes: readonly string[];
}

export type Bitpix = 8 | 16 | 32 | 64 | -32 | -64;

/** A primary array or an IMAGE extension. */
export interface ImageHdu extends HduBase {
  readonly kind: 'image';
  readonly bitpix: Bitpix;
  /** NAXIS1, NAXIS2, …; the first runs fastest. Empty where there are no data. */
  readonly shape: readonly number[];
  /** Physical values: BSCALE and BZERO applied, BLANK turned into NaN. */
  readonly values: Float64Array;
}

/** One column of a binary table as its header describes it. */
export interface TableColumn {
  readonly name: string;
  readonly unit: string;
  /** Repeat count and letter of TFORM, such as 32 and D. */
  readonly repeat: number;
  readonly letter: string;
  /** TDIM, first axis fastest; empty where the column has none. */
  readonly dimensions: readonly number[];
  readonly byteOffset: number;
  readonly scale: number;
  readonly zero: number;
  readonly blank?: number;
}

/** A binary table; columns are decoded by those who ask for one (fits-table.ts). */
export interface TableHdu extends HduBase {
  readonly kind: 'table';
  readonly columns: readonly TableColumn[];
  readonly rowBytes: number;
  readonly rowCount: number;
  readonly rows: Uint8Array;
}

/** An extension of a type that is not read, such as an ASCII table. */
export interface OtherHdu extends HduBase {
  readonly kind: 'other';
  readonly type: string;
}

export type FitsHdu = ImageHdu | TableHdu | OtherHdu;

/** Where in a FITS file something is: for messages. */
export interface FitsPlace {
  readonly file: string;
  /** Such as `HDU 1 (SCENE)`. */
  readonly hdu: string;
}

/** The place of the HDU of this index (0: primary). */
export function fitsPlace(file: string, index: number, name = ''): FitsPlace {
  const label = name === '' ? (index === 0 ? 'primary' : '') : name;
  return { file, hdu: label === '' ? `HDU ${index}` : `HDU ${index} (${label})` };
}

/** An InputError that names file and HDU. */
export function fitsError(place: FitsPlace, reason: string): InputError {
  return new InputError(`${place.hdu}: ${reason}`, { file: place.file });
}

export const BLOCK_BYTES = 2880;

/** Bytes up to the next multiple of the FITS block of 2880 bytes. */
export function blockedLength(byteCount: number): number {
  return Math.ceil(byteCount / BLOCK_BYTES) * BLOCK_BYTES;
}
