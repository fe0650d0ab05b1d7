/** An array of numbers as a file holds it, in the order of its indices with the last running fastest. */
export interface GridArray {
  /** Name of the FITS extension; empty where the file gives none. */
  readonly name: string;
  /** Numbers along each index, as NumPy shows them: of a FITS image NAXIS2, NAXIS1. */
  readonly shape: readonly number[];
  readonly values: Float32Array | Float64Array;
  /** Keywords of a FITS header; empty for other files. */
  readonly keywords: ReadonlyMap<string, string | number | boolean>;
}

/** A file of gridded numbers. */
export interface GridFile {
  readonly arrays: readonly GridArray[];
  /** Of the file's bytes, 64 hexadecimal digits. */
  readonly sha256: string;
}

/**
 * Where a scene's gridded files come from: beside the scene on disk, or dropped on a page. Throws
 * InputError where there is no such file or it cannot be understood.
 */
export type GridSource = (file: string) => GridFile;

/** Most bytes that the grids of a component may take, and that a file of one may hold: every worker keeps a copy. */
export const mostGridBytes = 2 ** 30;

/** A number of bytes for people. */
export function bytesText(bytes: number): string {
  const [factor, unit] = bytes >= 2 ** 30 ? [2 ** 30, 'GiB'] : bytes >= 2 ** 20 ? [2 ** 20, 'MiB'] : [2 ** 10, 'KiB'];
  return `${(bytes / factor).toPrecision(3)} ${unit}`;
}
