import { closeSync, fstatSync, openSync, readSync } from 'node:fs';
import { InputError } from '../units/input-error.ts';
import { decodeNumbers, imageScaling } from './fits-image-read.ts';
import { readFirstHeader, readUnits } from './fits-read.ts';
import { fitsError, fitsPlace, type FitsHdu } from './fits-types.ts';
import { isGzip } from './gunzip.ts';
import { readBytes } from './node-io.ts';
import { skyFacts } from './sky-fits-read.ts';
import type { SkyImage, SkyImageOverrides } from './sky-image.ts';

/** A cube in a file of which a few rows at a time are read. */
export interface CubeRows {
  readonly facts: Omit<SkyImage, 'values'>;
  /** Numbers in the file. */
  readonly count: number;
  /** Rows `from` to `to` (not included) of all channels of a Stokes plane, [channel * pixels + pixel]. */
  rows(from: number, to: number, stokes?: number): Float64Array;
  /** One channel of a Stokes plane, [row * nx + column]. */
  plane(channel: number, stokes?: number): Float64Array;
  close(): void;
}

const headerBlock = 1 << 16;
const longestHeader = 1 << 26;

/**
 * Opens the image in the first unit of a FITS file for reading by rows; undefined where that is not
 * possible: packed by gzip, the image in an extension, or other axes before the two of the sky. Throws
 * InputError for a header that is wrong and a file that is cut.
 */
export function openCubeRows(path: string, fileName: string, overrides: SkyImageOverrides = {}): CubeRows | undefined {
  const file = openFile(path, fileName);
  try {
    const opened = openRows(file, fileName, overrides);
    if (!opened) closeSync(file);
    return opened;
  } catch (error) {
    closeSync(file);
    throw error;
  }
}

function openRows(file: number, fileName: string, overrides: SkyImageOverrides): CubeRows | undefined {
  const size = fstatSync(file).size;
  const head = readHead(file, size, fileName);
  if (!head) return undefined;
  const { hdu, dataStart, dataEnd } = head;
  if (hdu.shape.length < 2 || (overrides.hduIndex ?? 0) !== 0) return undefined;
  const width = Math.abs(hdu.bitpix) / 8;
  const place = fitsPlace(fileName, 0);
  const count = hdu.shape.reduce((product, n) => product * n, 1);
  if (dataStart + count * width > size) throw fitsError(place, `${hdu.shape.join(' x ')} numbers need ${count * width} bytes of data, but the file holds ${size - dataStart}: is it cut?`);
  const rest = bytesAt(file, Math.min(dataEnd, size), Math.max(0, size - dataEnd));
  const hdus: FitsHdu[] = [hdu, ...readUnits(rest, fileName, 1)];
  const { facts, order } = skyFacts(hdu, hdus, place, overrides, []);
  const [stokes, layer, row, column] = order;
  if (column.stride !== 1 || row.stride !== facts.nx) return undefined;
  const scaling = imageScaling(hdu.cards, hdu.bitpix, place);
  const part = (plane: number, channel: number, from: number, to: number): Float64Array => {
    const first = plane * stokes.stride + channel * layer.stride + from * row.stride;
    return decodeNumbers(bytesAt(file, dataStart + first * width, (to - from) * facts.nx * width), hdu.bitpix, scaling);
  };
  return {
    facts,
    count,
    rows: (from, to, plane = 0) => {
      const pixels = (to - from) * facts.nx;
      const values = new Float64Array(layer.length * pixels);
      for (let channel = 0; channel < layer.length; channel++) values.set(part(plane, channel, from, to), channel * pixels);
      return values;
    },
    plane: (channel, plane = 0) => part(plane, channel, 0, facts.ny),
    close: () => closeSync(file),
  };
}

/** The first header, read as far as its END; undefined for gzip, and for a first unit without data. */
function readHead(file: number, size: number, fileName: string): ReturnType<typeof readFirstHeader> | undefined {
  for (let length = headerBlock; ; length *= 4) {
    const bytes = bytesAt(file, 0, Math.min(length, size));
    if (isGzip(bytes)) return undefined;
    try {
      return readFirstHeader(bytes, fileName);
    } catch (error) {
      // Perhaps END lies farther on.
      if (length >= size || length >= longestHeader) throw error;
    }
  }
}

function openFile(path: string, fileName: string): number {
  try {
    return openSync(path, 'r');
  } catch {
    // It says why.
    readBytes(path);
    throw new InputError('the file cannot be read', { file: fileName });
  }
}

function bytesAt(file: number, position: number, length: number): Uint8Array {
  const bytes = new Uint8Array(length);
  let done = 0;
  while (done < length) {
    const read = readSync(file, bytes, done, length - done, position + done);
    if (read === 0) break;
    done += read;
  }
  return bytes.subarray(0, done);
}
