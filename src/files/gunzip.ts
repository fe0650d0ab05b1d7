import { Gunzip } from 'fflate';
import { InputError } from '../units/input-error.ts';
import { crc32 } from './crc32.ts';

const CHUNK_BYTES = 1 << 18;
const TRAILER_BYTES = 8;

/** Do the bytes begin like a gzip file (RFC 1952)? */
export function isGzip(bytes: Uint8Array): boolean {
  return bytes.length > 2 && bytes[0] === 0x1f && bytes[1] === 0x8b;
}

/**
 * Unpack a gzip file of one or more members. The unpacker checks neither length nor CRC-32, so both
 * are checked here for each member. Throws InputError where the file is cut or damaged.
 */
export function gunzip(bytes: Uint8Array, file: string): Uint8Array {
  const parts: Uint8Array[] = [];
  let crc = 0;
  let memberBytes = 0;
  const closeMember = (end: number): void => {
    if (end < TRAILER_BYTES) throw damaged('it ends too early', file);
    const trailer = new DataView(bytes.buffer, bytes.byteOffset + end - TRAILER_BYTES, TRAILER_BYTES);
    if (trailer.getUint32(0, true) !== crc) throw damaged('its CRC-32 does not fit its content', file);
    if (trailer.getUint32(4, true) !== memberBytes % 2 ** 32) throw damaged('its length does not fit', file);
    crc = 0;
    memberBytes = 0;
  };

  const stream = new Gunzip((part) => {
    parts.push(part);
    crc = crc32(part, crc);
    memberBytes += part.length;
  });
  stream.onmember = closeMember;
  try {
    for (let start = 0; start < bytes.length; start += CHUNK_BYTES) {
      // A copy: the stream keeps and cuts what it is given.
      stream.push(bytes.slice(start, start + CHUNK_BYTES));
    }
    closeMember(bytes.length);
  } catch (error) {
    if (error instanceof InputError) throw error;
    throw damaged(error instanceof Error ? error.message : String(error), file);
  }
  return joined(parts);
}

function damaged(why: string, file: string): InputError {
  return new InputError(`the gzip file is cut or damaged: ${why}`, { file });
}

function joined(parts: readonly Uint8Array[]): Uint8Array {
  const whole = new Uint8Array(parts.reduce((sum, part) => sum + part.length, 0));
  let offset = 0;
  for (const part of parts) {
    whole.set(part, offset);
    offset += part.length;
  }
  return whole;
}
