import { bytesText, mostGridBytes, type GridArray, type GridFile, type GridSource } from '../field/grid-file.ts';
import { InputError } from '../units/input-error.ts';
import { readFits, readFirstHeader } from './fits-read.ts';
import type { FileSource } from './load-data.ts';
import { isNpy, readNpy } from './npy.ts';
import { sha256Hex } from './sha256.ts';

/** Reads gridded numbers from a source of files: FITS images, or NumPy's `.npy`. A file is read once. */
export function gridSource(source: Pick<FileSource, 'bytes'>): GridSource {
  const known = new Map<string, GridFile>();
  return (file) => {
    const before = known.get(file);
    if (before) return before;
    const bytes = source.bytes(file);
    const arrays = isNpy(bytes) ? [readNpy(bytes, file)] : imagesOf(bytes, file);
    const read = { arrays, sha256: sha256Hex(bytes) };
    known.set(file, read);
    return read;
  };
}

function imagesOf(bytes: Uint8Array, file: string): readonly GridArray[] {
  const isFits = String.fromCharCode(...bytes.subarray(0, 6)) === 'SIMPLE';
  const isPacked = bytes[0] === 0x1f && bytes[1] === 0x8b;
  if (!isFits && !isPacked) throw new InputError('this is neither a FITS file nor a NumPy array file (.npy)', { file });
  if (isFits) refuseLarge(readFirstHeader(bytes, file).hdu.shape, file);
  const arrays = readFits(bytes, file).flatMap((hdu): GridArray[] => {
    if (hdu.kind !== 'image' || hdu.values.length === 0) return [];
    const keywords = new Map(hdu.cards.flatMap(({ keyword, value }) => (value === undefined ? [] : [[keyword, value] as const])));
    return [{ name: hdu.name, shape: [...hdu.shape].reverse(), values: hdu.values, keywords }];
  });
  if (arrays.length === 0) throw new InputError('the file holds no image', { file });
  return arrays;
}

/** Refuses before the numbers are decoded. */
function refuseLarge(shape: readonly number[], file: string): void {
  const bytes = 4 * shape.reduce((product, n) => product * n, 1);
  if (bytes > mostGridBytes) throw new InputError(`${shape.join(' x ')} numbers need ${bytesText(bytes)} of memory in every worker; at most ${bytesText(mostGridBytes)} are allowed`, { file });
}
