import type { ByteSink } from './byte-sink.ts';
import { instructions } from './instructions.ts';
import { signed, signedLong, unsigned } from './leb128.ts';

/** Types of a value in WebAssembly; `v128` always holds two numbers of 64 bits here. */
export type ValueType = 'i32' | 'i64' | 'f64' | 'v128';

/** Instructions that leave one value of a type: those of the operands, then its own. */
export interface Code<T extends ValueType> {
  readonly type: T;
  readonly operands: readonly Code<ValueType>[];
  readonly instruction: readonly number[];
}

/** Two numbers side by side. */
export type Vector = Code<'v128'>;
/** One number. */
export type Float = Code<'f64'>;
/** A whole number: an address, a count or a truth. */
export type Int = Code<'i32'>;
/** A whole number of 64 bits. */
export type Long = Code<'i64'>;

const nothing: readonly never[] = [];

/** Code without operands. */
export function leaf<T extends ValueType>(type: T, instruction: readonly number[]): Code<T> {
  return { type, operands: nothing, instruction };
}

/** Writes an expression's bytes in order. */
export function writeCode(sink: ByteSink, code: Code<ValueType>): void {
  for (const operand of code.operands) writeCode(sink, operand);
  sink.append(code.instruction);
}

/** Joins operands, an instruction and its immediate values to one expression. */
function join<T extends ValueType>(type: T, operands: readonly Code<ValueType>[], instruction: readonly number[], immediates: readonly number[] = nothing): Code<T> {
  return { type, operands, instruction: immediates.length === 0 ? instruction : [...instruction, ...immediates] };
}

type Monadic<A extends ValueType, T extends ValueType> = (a: Code<A>) => Code<T>;
type Dyadic<A extends ValueType, T extends ValueType> = (a: Code<A>, b: Code<A>) => Code<T>;

function monadic<A extends ValueType, T extends ValueType>(type: T, name: string): Monadic<A, T> {
  return (a) => join(type, [a], instructions[name]);
}

function dyadic<A extends ValueType, T extends ValueType>(type: T, name: string): Dyadic<A, T> {
  return (a, b) => join(type, [a, b], instructions[name]);
}

const vectors = (name: string): Dyadic<'v128', 'v128'> => dyadic('v128', name);
const floats = (name: string): Dyadic<'f64', 'f64'> => dyadic('f64', name);
const ints = (name: string): Dyadic<'i32', 'i32'> => dyadic('i32', name);
const longs = (name: string): Dyadic<'i64', 'i64'> => dyadic('i64', name);

const memoryArguments = (align: number, offset: number): number[] => [align, ...unsigned(offset)];
const inSteps = (name: string) => (a: Vector, count: number): Vector => join('v128', [a, int.constant(count)], instructions[name]);

/** Operations on two numbers at a time. Comparisons give all ones or all zeros per lane. */
export const vector = {
  load: (address: Int, offset = 0): Vector => join('v128', [address], instructions['v128.load'], memoryArguments(4, offset)),
  /** The same pattern of 64 bits in both lanes. */
  constant: (bits: bigint): Vector => {
    const half = new Uint8Array(BigUint64Array.of(bits).buffer);
    return leaf('v128', [...instructions['v128.const'], ...half, ...half]);
  },
  /** One number of 64 bits from memory in both lanes. */
  loadSplat: (address: Int, offset = 0): Vector => join('v128', [address], instructions['v128.load64_splat'], memoryArguments(3, offset)),
  /** Two numbers of 32 bits from memory. */
  loadSingles: (address: Int, offset = 0): Vector =>
    join('v128', [join('v128', [address], instructions['v128.load64_zero'], memoryArguments(2, offset))], instructions['f64x2.promote_low_f32x4']),
  splat: monadic<'f64', 'v128'>('v128', 'f64x2.splat'),
  splatLong: monadic<'i64', 'v128'>('v128', 'i64x2.splat'),
  lane: (a: Vector, lane: 0 | 1): Float => join('f64', [a], instructions['f64x2.extract_lane'], [lane]),
  laneLong: (a: Vector, lane: 0 | 1): Long => join('i64', [a], instructions['i64x2.extract_lane'], [lane]),
  withLane: (a: Vector, lane: 0 | 1, value: Float): Vector => join('v128', [a, value], instructions['f64x2.replace_lane'], [lane]),
  /** [a of lane i, b of lane j]. */
  shuffle: (a: Vector, i: 0 | 1, b: Vector, j: 0 | 1): Vector =>
    join('v128', [a, b], instructions['i8x16.shuffle'], [...Array.from({ length: 8 }, (_, k) => 8 * i + k), ...Array.from({ length: 8 }, (_, k) => 16 + 8 * j + k)]),
  add: vectors('f64x2.add'),
  subtract: vectors('f64x2.sub'),
  multiply: vectors('f64x2.mul'),
  divide: vectors('f64x2.div'),
  /** b < a ? b : a: the first where either is no number. */
  lesser: vectors('f64x2.pmin'),
  /** a < b ? b : a: the first where either is no number. */
  greater: vectors('f64x2.pmax'),
  /** The smaller, NaN where either is NaN. */
  min: vectors('f64x2.min'),
  /** The larger, NaN where either is NaN. */
  max: vectors('f64x2.max'),
  negate: monadic<'v128', 'v128'>('v128', 'f64x2.neg'),
  abs: monadic<'v128', 'v128'>('v128', 'f64x2.abs'),
  sqrt: monadic<'v128', 'v128'>('v128', 'f64x2.sqrt'),
  floor: monadic<'v128', 'v128'>('v128', 'f64x2.floor'),
  nearest: monadic<'v128', 'v128'>('v128', 'f64x2.nearest'),
  equal: vectors('f64x2.eq'),
  notEqual: vectors('f64x2.ne'),
  less: vectors('f64x2.lt'),
  lessOrEqual: vectors('f64x2.le'),
  greaterThan: vectors('f64x2.gt'),
  greaterOrEqual: vectors('f64x2.ge'),
  and: vectors('v128.and'),
  /** a and not b. */
  andNot: vectors('v128.andnot'),
  or: vectors('v128.or'),
  xor: vectors('v128.xor'),
  /** Bits of `yes` where the mask is one, of `no` where it is zero. */
  select: (mask: Vector, yes: Vector, no: Vector): Vector => join('v128', [yes, no, mask], instructions['v128.bitselect']),
  anyTrue: monadic<'v128', 'i32'>('i32', 'v128.any_true'),
  addBits: vectors('i64x2.add'),
  subtractBits: vectors('i64x2.sub'),
  equalBits: vectors('i64x2.eq'),
  shiftLeft: inSteps('i64x2.shl'),
  shiftRight: inSteps('i64x2.shr_u'),
  /** The lower two 32-bit whole numbers of a number truncated, both lanes. */
  truncate: monadic<'v128', 'v128'>('v128', 'i32x4.trunc_sat_f64x2_s_zero'),
  laneInt: (a: Vector, lane: 0 | 1): Int => join('i32', [a], instructions['i32x4.extract_lane'], [lane]),
};

/** Operations on one number. */
export const float = {
  constant: (value: number): Float => leaf('f64', [...instructions['f64.const'], ...new Uint8Array(new Float64Array([value]).buffer)]),
  load: (address: Int, offset = 0): Float => join('f64', [address], instructions['f64.load'], memoryArguments(3, offset)),
  add: floats('f64.add'),
  subtract: floats('f64.sub'),
  multiply: floats('f64.mul'),
  divide: floats('f64.div'),
  min: floats('f64.min'),
  max: floats('f64.max'),
  abs: monadic<'f64', 'f64'>('f64', 'f64.abs'),
  negate: monadic<'f64', 'f64'>('f64', 'f64.neg'),
  sqrt: monadic<'f64', 'f64'>('f64', 'f64.sqrt'),
  floor: monadic<'f64', 'f64'>('f64', 'f64.floor'),
  ceil: monadic<'f64', 'f64'>('f64', 'f64.ceil'),
  /** The whole number below in size, 0 for no number. */
  toInt: monadic<'f64', 'i32'>('i32', 'i32.trunc_sat_f64_s'),
  fromLong: monadic<'i64', 'f64'>('f64', 'f64.convert_i64_s'),
  toLong: monadic<'f64', 'i64'>('i64', 'i64.trunc_f64_s'),
  fromBits: monadic<'i64', 'f64'>('f64', 'f64.reinterpret_i64'),
  bits: monadic<'f64', 'i64'>('i64', 'i64.reinterpret_f64'),
  equal: dyadic<'f64', 'i32'>('i32', 'f64.eq'),
  notEqual: dyadic<'f64', 'i32'>('i32', 'f64.ne'),
  less: dyadic<'f64', 'i32'>('i32', 'f64.lt'),
  lessOrEqual: dyadic<'f64', 'i32'>('i32', 'f64.le'),
  greaterThan: dyadic<'f64', 'i32'>('i32', 'f64.gt'),
};

/** Operations on whole numbers of 32 bits. */
export const int = {
  constant: (value: number): Int => leaf('i32', [...instructions['i32.const'], ...signed(value)]),
  load: (address: Int, offset = 0): Int => join('i32', [address], instructions['i32.load'], memoryArguments(2, offset)),
  add: ints('i32.add'),
  subtract: ints('i32.sub'),
  multiply: ints('i32.mul'),
  and: ints('i32.and'),
  or: ints('i32.or'),
  less: ints('i32.lt_s'),
  greaterThan: ints('i32.gt_s'),
  greaterOrEqual: ints('i32.ge_s'),
  equal: ints('i32.eq'),
  shiftLeft: ints('i32.shl'),
  not: monadic<'i32', 'i32'>('i32', 'i32.eqz'),
  fromLong: monadic<'i64', 'i32'>('i32', 'i32.wrap_i64'),
};

/** Operations on whole numbers of 64 bits. */
export const long = {
  constant: (value: bigint): Long => leaf('i64', [...instructions['i64.const'], ...signedLong(BigInt.asIntN(64, value))]),
  load32: (address: Int, offset = 0): Long => join('i64', [address], instructions['i64.load32_u'], memoryArguments(2, offset)),
  add: longs('i64.add'),
  subtract: longs('i64.sub'),
  multiply: longs('i64.mul'),
  and: longs('i64.and'),
  or: longs('i64.or'),
  shiftLeft: longs('i64.shl'),
  shiftRight: longs('i64.shr_u'),
  shiftRightSigned: longs('i64.shr_s'),
};
