import { zlibSync } from 'fflate';
import { crc32 } from '../files/crc32.ts';

const SIGNATURE = [137, 80, 78, 71, 13, 10, 26, 10];

/**
 * A PNG with a palette, 8 bits a pixel. `indices` from the top row down, left to right; `palette`
 * three bytes an entry, 256 entries; index 0 is fully transparent. The same input gives the same bytes.
 */
export function indexedPng(indices: Uint8Array, width: number, height: number, palette: Uint8Array): Uint8Array {
  if (indices.length !== width * height) {
    throw new RangeError(`${indices.length} pixels given for an image of ${width} x ${height}`);
  }
  const rows = new Uint8Array((width + 1) * height);
  for (let row = 0; row < height; row++) rows.set(indices.subarray(row * width, (row + 1) * width), row * (width + 1) + 1);
  const header = new Uint8Array(13);
  const view = new DataView(header.buffer);
  view.setUint32(0, width);
  view.setUint32(4, height);
  header.set([8, 3, 0, 0, 0], 8);
  return concatenate([
    Uint8Array.from(SIGNATURE),
    chunk('IHDR', header),
    chunk('PLTE', palette),
    chunk('tRNS', Uint8Array.of(0)),
    chunk('IDAT', zlibSync(rows, { level: 9 })),
    chunk('IEND', new Uint8Array(0)),
  ]);
}

/** PNG bytes as a data URI. */
export function pngDataUri(png: Uint8Array): string {
  let binary = '';
  for (let start = 0; start < png.length; start += 8192) {
    binary += String.fromCharCode(...png.subarray(start, start + 8192));
  }
  return `data:image/png;base64,${btoa(binary)}`;
}

/** Length, type, data and CRC-32 of a chunk (PNG specification, section 5.3). */
export function chunk(type: string, data: Uint8Array): Uint8Array {
  const bytes = new Uint8Array(12 + data.length);
  const view = new DataView(bytes.buffer);
  view.setUint32(0, data.length);
  for (let k = 0; k < 4; k++) bytes[4 + k] = type.charCodeAt(k);
  bytes.set(data, 8);
  view.setUint32(8 + data.length, crc32(bytes.subarray(4, 8 + data.length)));
  return bytes;
}

function concatenate(parts: readonly Uint8Array[]): Uint8Array {
  const whole = new Uint8Array(parts.reduce((sum, part) => sum + part.length, 0));
  let at = 0;
  for (const part of parts) {
    whole.set(part, at);
    at += part.length;
  }
  return whole;
}
