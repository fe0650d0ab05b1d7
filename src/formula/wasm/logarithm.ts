import { vector as v, type Vector } from './code.ts';
import { logarithm, logarithm2 } from './coefficients.ts';
import { exp, exp2 } from './exponential.ts';
import type { FunctionWriter } from './function.ts';
import { polynomial } from './polynomial.ts';

const ln2High = 0.6931471803691238;
const ln2Low = 1.9082149292705877e-10;
const smallestNormal = 2.2250738585072014e-308;

/** x = 2^k m for a positive number of full precision: k, m - 1 and s = (m-1)/(m+1), with m about 1. */
function split(w: FunctionWriter, x: Vector): { readonly k: Vector; readonly less: Vector; readonly s: Vector } {
  const exponent = w.let(v.shiftRight(v.subtractBits(x, v.constant(0x3fe6a09e667f3bcdn)), 52));
  const m = v.subtractBits(x, v.shiftLeft(exponent, 52));
  // The exponent, 12 bits with sign, is made a number: wrapped to 0 … 4095, then brought back.
  const wrapped = w.let(v.subtract(v.or(v.and(exponent, v.constant(0xfffn)), w.constant(2 ** 52)), w.constant(2 ** 52)));
  const k = w.let(v.subtract(wrapped, v.and(v.greaterOrEqual(wrapped, w.constant(2048)), w.constant(4096))));
  const less = w.let(v.subtract(m, w.constant(1)));
  return { k, less, s: w.let(v.divide(less, v.add(w.constant(2), less))) };
}

/** ln x: -Infinity at 0, NaN below. ln m = 2 artanh(s), the rest as in fdlibm. */
export function log(w: FunctionWriter, x: Vector): Vector {
  const isSmall = w.let(v.less(x, w.constant(smallestNormal)));
  const scaled = split(w, w.let(v.select(isSmall, v.multiply(x, w.constant(2 ** 54)), x)));
  const { less, s } = scaled;
  const k = w.let(v.subtract(scaled.k, v.and(isSmall, w.constant(54))));
  const square = w.let(v.multiply(s, s));
  const rest = v.multiply(square, polynomial(w, square, logarithm));
  const halfSquare = w.let(v.multiply(v.multiply(w.constant(0.5), less), less));
  const low = v.add(v.multiply(s, v.add(halfSquare, rest)), v.multiply(k, w.constant(ln2Low)));
  const value = v.subtract(v.multiply(k, w.constant(ln2High)), v.subtract(v.subtract(halfSquare, low), less));
  const isPlain = v.and(v.greaterThan(x, w.constant(0)), v.less(x, w.constant(Infinity)));
  const notPositive = v.select(v.equal(x, w.constant(0)), w.constant(-Infinity), w.constant(NaN));
  return w.let(v.select(isPlain, value, v.select(v.equal(x, w.constant(Infinity)), x, notPositive)));
}

/** x^y with the special cases of Math.pow: 2^(y log2 x) where both are plain numbers, x above 0. */
export function pow(w: FunctionWriter, x: Vector, y: Vector): Vector {
  const { k, s } = split(w, x);
  const exponent = v.add(k, v.multiply(s, polynomial(w, w.let(v.multiply(s, s)), logarithm2)));
  const result = w.variable('v128', exp2(w, w.let(v.multiply(y, exponent))));
  const isPlain = w.let(v.and(v.and(v.greaterOrEqual(x, w.constant(smallestNormal)), v.less(x, w.constant(Infinity))), v.less(v.abs(y), w.constant(Infinity))));
  const special = w.module.once('powSpecial', ['v128', 'v128'], ['v128'], (inner) => {
    inner.leave(powSpecial(inner, inner.parameter(0, 'v128'), inner.parameter(1, 'v128')));
  });
  w.when(v.anyTrue(v.andNot(v.constant((1n << 64n) - 1n), isPlain)), () => result.set(v.select(isPlain, result, w.call(special, 'v128', x, y))));
  return w.let(result);
}

/** Bases that are negative, zero, infinite or below full precision, and exponents that are infinite or none. */
function powSpecial(w: FunctionWriter, x: Vector, y: Vector): Vector {
  const size = exp(w, w.let(v.multiply(y, log(w, w.let(v.abs(x))))));
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
