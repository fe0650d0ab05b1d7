import { bytesText, mostGridBytes, type GridArray } from '../field/grid-file.ts';
import { InputError } from '../units/input-error.ts';

/** Types of numbers that are read: name in the header → bytes of one. */
const widths: Readonly<Record<string, 4 | 8>> = { '<f4': 4, '<f8': 8 };
const magic = [0x93, 0x4e, 0x55, 0x4d, 0x50, 0x59];

/** Whether bytes begin as a NumPy array file does. */
export function isNpy(bytes: Uint8Array): boolean {
  return magic.every((byte, k) => bytes[k] === byte);
}

/**
 * A NumPy array file (`.npy`, format versions 1 to 3; NumPy Enhancement Proposal 1): float32 or
 * float64, little-endian, C or Fortran order. Throws InputError that says what is given and allowed.
 */
export function readNpy(bytes: Uint8Array, file: string): GridArray {
  const { text, dataStart } = headerOf(bytes, file);
  const entry = (name: string, pattern: string): string => {
    const match = new RegExp(`'${name}'\\s*:\\s*${pattern}`).exec(text);
    if (!match) throw new InputError(`the header has no ${name} that is understood: ${text.trim().slice(0, 200)}`, { file });
    return match[1];
  };
  const type = entry('descr', `'([^']*)'`);
  const isFortran = entry('fortran_order', '(True|False)') === 'True';
  const shape = entry('shape', '\\(([^)]*)\\)').split(',').map((part) => part.trim()).filter((part) => part !== '').map(Number);
  const width = widths[type];
  if (width === undefined) throw new InputError(`the numbers are of type ${type}; allowed: ${Object.keys(widths).join(', ')} (float32 or float64, little-endian)`, { file });
  if (shape.some((n) => !Number.isSafeInteger(n) || n < 1)) throw new InputError(`the shape (${shape.join(', ')}) holds no numbers`, { file });
  const count = shape.reduce((product, n) => product * n, 1);
  const held = bytes.length - dataStart;
  if (held !== count * width) {
    throw new InputError(`the shape (${shape.join(', ')}) of ${type} needs ${count * width} bytes of numbers, but the file holds ${held}${held < count * width ? ': is it cut?' : ''}`, { file });
  }
  if (count * 4 > mostGridBytes) throw new InputError(`${shape.join(' x ')} numbers need ${bytesText(4 * count)} of memory in every worker; at most ${bytesText(mostGridBytes)} are allowed`, { file });
  const values = numbersOf(bytes, dataStart, count, width);
  return { name: '', shape, values: isFortran ? fromFortranOrder(values, shape) : values, keywords: new Map() };
}

function headerOf(bytes: Uint8Array, file: string): { text: string; dataStart: number } {
  if (!isNpy(bytes)) throw new InputError('not a NumPy array file: it does not begin with \\x93NUMPY', { file });
  const version = bytes[6];
  if (![1, 2, 3].includes(version)) throw new InputError(`the format version is ${version}.${bytes[7]}; allowed: 1.0, 2.0, 3.0`, { file });
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const start = version === 1 ? 10 : 12;
  if (bytes.length < start) throw new InputError('the file ends within its header: is it cut?', { file });
  const length = version === 1 ? view.getUint16(8, true) : view.getUint32(8, true);
  if (bytes.length < start + length) throw new InputError('the file ends within its header: is it cut?', { file });
  return { text: new TextDecoder().decode(bytes.subarray(start, start + length)), dataStart: start + length };
}

function numbersOf(bytes: Uint8Array, start: number, count: number, width: 4 | 8): Float32Array | Float64Array {
  const view = new DataView(bytes.buffer, bytes.byteOffset + start, count * width);
  if (width === 4) {
    const values = new Float32Array(count);
    for (let k = 0; k < count; k++) values[k] = view.getFloat32(4 * k, true);
    return values;
  }
  const values = new Float64Array(count);
  for (let k = 0; k < count; k++) values[k] = view.getFloat64(8 * k, true);
  return values;
}

/** The same array with the last index fastest instead of the first. */
function fromFortranOrder(values: Float32Array | Float64Array, shape: readonly number[]): Float32Array | Float64Array {
  const result = values.slice();
  const index = shape.map(() => 0);
  for (let at = 0; at < values.length; at++) {
    let target = 0;
    for (let axis = 0; axis < shape.length; axis++) target = target * shape[axis] + index[axis];
    result[target] = values[at];
    for (let axis = 0; axis < shape.length; axis++) {
      if (++index[axis] < shape[axis]) break;
      index[axis] = 0;
    }
  }
  return result;
}

/** An array as a NumPy array file: format version 1.0, little-endian, C order. */
export function writeNpy(values: Float32Array | Float64Array, shape: readonly number[]): Uint8Array {
  const type = values instanceof Float32Array ? '<f4' : '<f8';
  const width = widths[type];
  const entries = `{'descr': '${type}', 'fortran_order': False, 'shape': (${shape.join(', ')}${shape.length === 1 ? ',' : ''}), }`;
  // Header and its length make a multiple of 64 bytes and end in a line feed.
  const header = `${entries.padEnd(Math.ceil((11 + entries.length) / 64) * 64 - 11)}\n`;
  const bytes = new Uint8Array(10 + header.length + values.length * width);
  bytes.set([...magic, 1, 0]);
  const view = new DataView(bytes.buffer);
  view.setUint16(8, header.length, true);
  bytes.set(new TextEncoder().encode(header), 10);
  const start = 10 + header.length;
  values.forEach((value, k) => (width === 4 ? view.setFloat32(start + 4 * k, value, true) : view.setFloat64(start + 8 * k, value, true)));
  return bytes;
}
