import { float as f, int, long, vector as v, type Float, type Long, type Vector } from './code.ts';
import { arcTangent, cosine, sine, twoOverPiWords } from './coefficients.ts';
import { roundingShift } from './exponential.ts';
import type { FunctionWriter } from './function.ts';
import type { Callee, ModuleWriter } from './module.ts';
import { polynomial } from './polynomial.ts';

/** π/2 in three parts; the first two have 33 bits, so that their products with small whole numbers are exact. */
const halfPi = [1.5707963267341256, 6.077100506303966e-11, 2.0222662487959506e-21] as const;
/** Angles up to here, about 2^19 quarters of a turn, are reduced with three parts of π/2. */
export const largestPlainAngle = 8e5;

/** sin and cos of angles up to `largestPlainAngle`. */
export function sineCosinePlain(w: FunctionWriter, x: Vector): readonly [Vector, Vector] {
  const shifted = w.let(v.add(v.multiply(x, w.constant(0.6366197723675814)), w.constant(roundingShift)));
  const n = w.let(v.subtract(shifted, w.constant(roundingShift)));
  const r = halfPi.reduce<Vector>((rest, part) => v.subtract(rest, v.multiply(n, w.constant(part))), x);
  return fromQuadrant(w, w.let(r), shifted);
}

/** sin and cos of r + q π/2 with |r| ≤ π/4 and q in the lowest bits of a number. */
function fromQuadrant(w: FunctionWriter, r: Vector, quadrant: Vector): readonly [Vector, Vector] {
  const square = w.let(v.multiply(r, r));
  const sin = w.let(v.add(r, v.multiply(v.multiply(square, r), polynomial(w, square, sine))));
  const half = w.let(v.multiply(square, w.constant(0.5)));
  const cos = w.let(v.add(v.subtract(w.constant(1), half), v.multiply(v.multiply(square, square), polynomial(w, square, cosine))));
  const one = v.constant(1n);
  const isEven = w.let(v.equalBits(v.and(quadrant, one), w.constant(0)));
  const signBit = w.constant(-0);
  const sineSign = v.and(v.shiftLeft(quadrant, 62), signBit);
  const cosineSign = v.and(v.shiftLeft(v.addBits(quadrant, one), 62), signBit);
  return [w.let(v.xor(v.select(isEven, sin, cos), sineSign)), w.let(v.xor(v.select(isEven, cos, sin), cosineSign))];
}

/** A function that gives sin and cos of any two angles. */
export function sineCosineFunction(module: ModuleWriter): Callee {
  return module.once('sineCosine', ['v128'], ['v128', 'v128'], (w) => {
    const x = w.parameter(0, 'v128');
    w.when(v.anyTrue(v.greaterThan(v.abs(x), w.constant(largestPlainAngle))), () => {
      const r = w.variable('v128');
      const quadrant = w.variable('v128');
      const lanes = ([0, 1] as const).map((lane) => w.run(reduceLarge(module), v.lane(x, lane)) as readonly [Float, Long]);
      r.set(v.withLane(v.splat(lanes[0][0]), 1, lanes[1][0]));
      const [low, high] = lanes.map(([, q]) => v.splatLong(q));
      quadrant.set(v.shuffle(low, 0, high, 0));
      w.leave(...fromQuadrant(w, r, quadrant));
    });
    w.leave(...sineCosinePlain(w, x));
  });
}

/** sin and cos of any angles. */
export function sineCosine(w: FunctionWriter, x: Vector): readonly [Vector, Vector] {
  return w.run(sineCosineFunction(w.module), x) as readonly [Vector, Vector];
}

/**
 * Any finite angle less whole quarters of a turn, and how many those are modulo 2^62: the bits of
 * 2/π that matter times the number's 53 bits (Payne & Hanek 1983). NaN for NaN and infinity.
 */
function reduceLarge(module: ModuleWriter): Callee {
  return module.once('reduceLarge', ['f64'], ['f64', 'i64'], (w) => {
    const x = w.parameter(0, 'f64');
    w.when(int.not(f.less(f.abs(x), f.constant(Infinity))), () => w.leave(f.subtract(x, x), long.constant(0n)));
    w.when(f.less(f.abs(x), f.constant(0.5)), () => w.leave(x, long.constant(0n)));
    // Zeros stand for the bits before the point: x = mantissa · 2^shift.
    const words = module.words([0, 0, 0, ...twoOverPiWords, 0, 0]);
    const bits = w.let(f.bits(f.abs(x)));
    const shift = w.let(long.subtract(long.shiftRight(bits, long.constant(52n)), long.constant(1075n)));
    const mantissa = w.let(long.or(long.and(bits, long.constant((1n << 52n) - 1n)), long.constant(1n << 52n)));
    // From where on bits of 2/π matter modulo 4: all before give whole turns.
    const offset = w.let(long.add(shift, long.constant(3n * 32n - 2n)));
    const word = w.let(int.fromLong(long.shiftRight(offset, long.constant(5n))));
    const bit = w.let(long.and(offset, long.constant(31n)));
    const address = w.let(int.shiftLeft(word, int.constant(2)));
    const at = (k: number): Long => long.load32(address, words + 4 * k);
    // Six words of 32 bits from there.
    const piece = (k: number): Long =>
      w.let(long.and(long.shiftRight(long.or(long.shiftLeft(at(k), long.constant(32n)), at(k + 1)), long.subtract(long.constant(32n), bit)), long.constant(0xffffffffn)));
    const pieces = [0, 1, 2, 3, 4, 5].map(piece);
    // mantissa = high · 2^32 + low; columns of 32 bits, from the last; what overflows the top is whole turns.
    const low = w.let(long.and(mantissa, long.constant(0xffffffffn)));
    const high = w.let(long.shiftRight(mantissa, long.constant(32n)));
    const mask = long.constant(0xffffffffn);
    const columns: Long[] = [];
    let carry: Long = long.constant(0n);
    for (let k = 5; k >= 0; k--) {
      // Column k takes low · piece k and high · piece k+1, halves apart so that nothing overflows.
      const a = w.let(long.multiply(low, pieces[k]));
      const b = k < 5 ? w.let(long.multiply(high, pieces[k + 1])) : long.constant(0n);
      const sum = w.let(long.add(long.add(long.and(a, mask), long.and(b, mask)), carry));
      columns[k] = w.let(long.and(sum, mask));
      carry = w.let(long.add(long.add(long.shiftRight(a, long.constant(32n)), long.shiftRight(b, long.constant(32n))), long.shiftRight(sum, long.constant(32n))));
    }
    finishReduction(w, x, columns);
  });
}

/** From the columns of x · 2/π, whose point is two bits below the top of column 0, to rest and quarters. */
function finishReduction(w: FunctionWriter, x: Float, columns: readonly Long[]): void {
  const pair = (k: number): Long => long.or(long.shiftLeft(columns[k], long.constant(32n)), columns[k + 1]);
  const [first, second] = [w.let(pair(0)), w.let(pair(2))];
  // Round to the nearest quarter: the fraction, as a signed number of 126 bits, becomes -½ … ½.
  const quarters = w.let(long.shiftRight(long.add(first, long.constant(1n << 61n)), long.constant(62n)));
  const fraction = w.let(long.subtract(first, long.shiftLeft(quarters, long.constant(62n))));
  const top = f.fromLong(fraction);
  const rest = f.multiply(f.fromLong(long.shiftRight(second, long.constant(1n))), f.constant(2 ** -63));
  // Where the leading bits cancel, the low part keeps the result's digits.
  const high = w.let(f.multiply(top, f.constant(2 ** -62)));
  const left = w.let(long.subtract(fraction, f.toLong(top)));
  const low = f.multiply(f.add(f.fromLong(left), rest), f.constant(2 ** -62));
  const [p, q] = [1.5707963267948966, 6.123233995736766e-17];
  const r = w.let(f.add(f.multiply(high, f.constant(p)), f.add(f.multiply(low, f.constant(p)), f.multiply(high, f.constant(q)))));
  w.when(f.less(x, f.constant(0)), () => w.leave(f.negate(r), long.subtract(long.constant(0n), quarters)));
  w.leave(r, quarters);
}

/** atan2(y, x) with the signs and zeros of Math.atan2. */
export function atan2(w: FunctionWriter, y: Vector, x: Vector): Vector {
  const [sizeY, sizeX] = [w.let(v.abs(y)), w.let(v.abs(x))];
  const isSteep = w.let(v.greaterThan(sizeY, sizeX));
  const isInfinite = w.let(v.equal(v.min(sizeY, sizeX), w.constant(Infinity)));
  const largest = w.let(v.max(sizeY, sizeX));
  const scale = w.let(v.select(v.greaterThan(largest, w.constant(1e300)), w.constant(1e-20), w.constant(1)));
  const a = w.let(v.select(isInfinite, w.constant(1), v.multiply(v.min(sizeY, sizeX), scale)));
  const b = w.let(v.select(isInfinite, w.constant(1), v.multiply(v.select(v.equal(largest, w.constant(0)), w.constant(1), largest), scale)));
  const isWide = w.let(v.greaterThan(a, v.multiply(b, w.constant(0.41421356237309503))));
  const t = w.let(v.divide(v.select(isWide, v.subtract(a, b), a), v.select(isWide, v.add(a, b), b)));
  const square = w.let(v.multiply(t, t));
  const bend = v.multiply(v.multiply(square, t), polynomial(w, square, arcTangent));
  const eighth = (value: number): Vector => v.and(isWide, w.constant(value));
  const small = w.let(v.add(eighth(0.7853981633974483), v.add(t, v.add(bend, eighth(3.061616997868383e-17)))));
  const steep = v.subtract(w.constant(1.5707963267948966), v.subtract(small, w.constant(6.123233995736766e-17)));
  const right = w.let(v.select(isSteep, steep, small));
  const left = v.subtract(w.constant(3.141592653589793), v.subtract(right, w.constant(1.2246467991473532e-16)));
  const signBit = w.constant(-0);
  // The sign of x counts also where x is zero.
  const isLeft = v.less(v.or(v.and(x, signBit), w.constant(1)), w.constant(0));
  const angle = v.or(v.select(isLeft, left, right), v.and(y, signBit));
  return w.let(v.select(v.or(v.notEqual(x, x), v.notEqual(y, y)), w.constant(NaN), angle));
}
