import { ByteSink } from './byte-sink.ts';
import { int, type ValueType } from './code.ts';
import { unsigned } from './leb128.ts';
import { FunctionWriter } from './function.ts';

/** A function of the module being written: what a call needs to know. */
export interface Callee {
  readonly index: number;
  readonly parameters: readonly ValueType[];
  readonly results: readonly ValueType[];
}

const typeCodes: Readonly<Record<ValueType, number>> = { i32: 0x7f, i64: 0x7e, f64: 0x7c, v128: 0x7b };
const pageBytes = 65536;

/**
 * A WebAssembly module as it is being written: functions, one exported memory, and tables of
 * numbers in it. Memory is given out from address 0 upwards; `heapStart` is the first address left free.
 */
export class ModuleWriter {
  private readonly types = new Map<string, number>();
  private readonly functions: { readonly type: number; body: Uint8Array }[] = [];
  private readonly shared = new Map<string, Callee>();
  private readonly exports: { readonly name: string; readonly index: number }[] = [];
  private readonly data: { readonly address: number; readonly bytes: Uint8Array }[] = [];
  private free = 0;

  /** Sets aside memory, aligned to 16 bytes; returns its address. */
  reserve(bytes: number): number {
    const address = this.free;
    this.free += Math.ceil(bytes / 16) * 16;
    return address;
  }

  /** Memory that holds these numbers when the module starts. */
  numbers(values: ArrayLike<number>): number {
    return this.place(new Uint8Array(Float64Array.from(values).buffer));
  }

  /** Memory that holds these 32-bit whole numbers when the module starts. */
  words(values: readonly number[]): number {
    return this.place(new Uint8Array(Uint32Array.from(values).buffer));
  }

  /** Writes a function once and returns how to call it; `name` also exports it where asked. */
  define(parameters: readonly ValueType[], results: readonly ValueType[], write: (writer: FunctionWriter) => void, exportAs?: string): Callee {
    const writer = new FunctionWriter(this, parameters);
    write(writer);
    const index = this.functions.push({ type: this.typeIndex(parameters, results), body: writer.finish() }) - 1;
    if (exportAs !== undefined) this.exports.push({ name: exportAs, index });
    return { index, parameters, results };
  }

  /** The function of that name, written where it is first asked for. */
  once(name: string, parameters: readonly ValueType[], results: readonly ValueType[], write: (writer: FunctionWriter) => void): Callee {
    const known = this.shared.get(name);
    if (known) return known;
    const callee = this.define(parameters, results, write);
    this.shared.set(name, callee);
    return callee;
  }

  /** First address that nothing here uses. */
  get heapStart(): number {
    return this.free;
  }

  /** The finished module. */
  encode(): Uint8Array<ArrayBuffer> {
    const pages = Math.ceil(this.free / pageBytes) + 1;
    const text = (name: string): number[] => [...unsigned(name.length), ...Array.from(name, (letter) => letter.charCodeAt(0))];
    const memoryIndex = 0;
    const exports = [[...text('memory'), 2, memoryIndex], ...this.exports.map(({ name, index }) => [...text(name), 0, ...unsigned(index)])];
    const segments = this.data.map(({ address, bytes }) => [0, ...int.constant(address).instruction, 0x0b, ...unsigned(bytes.length), ...bytes]);
    const sink = new ByteSink();
    sink.append([0x00, 0x61, 0x73, 0x6d, 1, 0, 0, 0]);
    writeSection(sink, 1, [...this.types.keys()].map((key) => JSON.parse(key) as number[]));
    writeSection(sink, 3, this.functions.map(({ type }) => unsigned(type)));
    writeSection(sink, 5, [[0, ...unsigned(pages)]]);
    writeSection(sink, 7, exports);
    writeSection(sink, 10, this.functions.map(({ body }) => body));
    writeSection(sink, 11, segments);
    return sink.bytes();
  }

  private place(bytes: Uint8Array): number {
    const address = this.reserve(bytes.length);
    this.data.push({ address, bytes });
    return address;
  }

  private typeIndex(parameters: readonly ValueType[], results: readonly ValueType[]): number {
    const codes = (list: readonly ValueType[]): number[] => [list.length, ...list.map((type) => typeCodes[type])];
    const key = JSON.stringify([0x60, ...codes(parameters), ...codes(results)]);
    const known = this.types.get(key);
    if (known !== undefined) return known;
    this.types.set(key, this.types.size);
    return this.types.size - 1;
  }
}

function writeSection(sink: ByteSink, id: number, items: readonly ArrayLike<number>[]): void {
  const count = unsigned(items.length);
  const length = items.reduce((sum, item) => sum + item.length, count.length);
  sink.append([id, ...unsigned(length), ...count]);
  for (const item of items) sink.append(item);
}
