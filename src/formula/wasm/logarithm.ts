import { vector as v, type Vector } from './code.ts';
import { logarithm } from './coefficients.ts';
import { exp } from './exponential.ts';
import type { FunctionWriter } from './function.ts';
import { polynomial } from './polynomial.ts';

const ln2High = 0.6931471803691238;
const ln2Low = 1.9082149292705877e-10;
const smallestNormal = 2.2250738585072014e-308;

/** ln x: -Infinity at 0, NaN below. x = 2^k m with m about 1, then ln m = 2 artanh(s) (as in fdlibm). */
export function log(w: FunctionWriter, x: Vector): Vector {
  const isSmall = w.let(v.less(x, w.constant(smallestNormal)));
  const scaled = w.let(v.select(isSmall, v.multiply(x, w.constant(2 ** 54)), x));
  const exponent = w.let(v.shiftRight(v.subtractBits(scaled, v.constant(0x3fe6a09e667f3bcdn)), 52));
  const m = v.subtractBits(scaled, v.shiftLeft(exponent, 52));
  // The exponent, 12 bits with sign, is made a number: wrapped to 0 … 4095, then brought back.
  const wrapped = w.let(v.subtract(v.or(v.and(exponent, v.constant(0xfffn)), w.constant(2 ** 52)), w.constant(2 ** 52)));
  const signed = v.subtract(wrapped, v.and(v.greaterOrEqual(wrapped, w.constant(2048)), w.constant(4096)));
  const k = w.let(v.subtract(signed, v.and(isSmall, w.constant(54))));
  const less = w.let(v.subtract(m, w.constant(1)));
  const s = w.let(v.divide(less, v.add(w.constant(2), less)));
  const square = w.let(v.multiply(s, s));
  const rest = v.multiply(square, polynomial(w, square, logarithm));
  const halfSquare = w.let(v.multiply(v.multiply(w.constant(0.5), less), less));
  const low = v.add(v.multiply(s, v.add(halfSquare, rest)), v.multiply(k, w.constant(ln2Low)));
  const value = v.subtract(v.multiply(k, w.constant(ln2High)), v.subtract(v.subtract(halfSquare, low), less));
  const isPlain = v.and(v.greaterThan(x, w.constant(0)), v.less(x, w.constant(Infinity)));
  const notPositive = v.select(v.equal(x, w.constant(0)), w.constant(-Infinity), w.constant(NaN));
  return w.let(v.select(isPlain, value, v.select(v.equal(x, w.constant(Infinity)), x, notPositive)));
}

/** x^y with the special cases of Math.pow. */
export function pow(w: FunctionWriter, x: Vector, y: Vector): Vector {
  const result = w.variable('v128', exp(w, w.let(v.multiply(y, log(w, w.let(v.abs(x)))))));
  const isPlain = v.and(v.and(v.greaterThan(x, w.constant(0)), v.less(x, w.constant(Infinity))), v.less(v.abs(y), w.constant(Infinity)));
  const special = w.module.once('powSpecial', ['v128', 'v128', 'v128'], ['v128'], (inner) => {
    const [base, exponent, size] = [0, 1, 2].map((k) => inner.parameter(k, 'v128'));
    inner.leave(powSpecial(inner, base, exponent, size));
  });
  w.when(v.anyTrue(v.andNot(v.constant((1n << 64n) - 1n), isPlain)), () => result.set(w.call(special, 'v128', x, y, result)));
  return w.let(result);
}

/** Bases that are negative, zero or infinite, and exponents that are infinite or none. */
function powSpecial(w: FunctionWriter, x: Vector, y: Vector, size: Vector): Vector {
  const [zero, one, nan] = [w.constant(0), w.constant(1), w.constant(NaN)];
  const isWhole = w.let(v.equal(y, v.floor(y)));
  const half = w.let(v.multiply(y, w.constant(0.5)));
  const isOdd = v.and(isWhole, v.notEqual(half, v.floor(half)));
  const oddSign = w.let(v.and(v.and(x, w.constant(-0)), isOdd));
  const isInfinite = v.equal(v.abs(y), w.constant(Infinity));
  let value: Vector = w.let(v.xor(size, oddSign));
  // A negative finite base to a broken power has no value.
  const broken = v.andNot(v.and(v.less(x, zero), v.greaterThan(x, w.constant(-Infinity))), isWhole);
  value = w.let(v.select(broken, nan, value));
  value = w.let(v.select(v.or(v.notEqual(x, x), v.notEqual(y, y)), nan, value));
  value = w.let(v.select(v.and(isInfinite, v.equal(v.abs(x), one)), nan, value));
  return v.select(v.equal(y, zero), one, value);
}
