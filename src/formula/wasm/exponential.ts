import { vector as v, type Vector } from './code.ts';
import { exponential, exponential2 } from './coefficients.ts';
import type { FunctionWriter } from './function.ts';
import { polynomial } from './polynomial.ts';

/** Adding it leaves a number below 2^51 rounded to a whole one, in the lowest bits. */
export const roundingShift = 6755399441055744;
const log2e = 1.4426950408889634;
const ln2High = 0.6931471803691238;
const ln2Low = 1.9082149292705877e-10;
/** Below, e^x has no full precision. */
const lowest = -708.39;

/** x = k ln2 + r: what e^x, e^x - 1 and the hyperbolic functions of x are made of. */
export interface Reduction {
  /** e^r - 1 */
  readonly less: Vector;
  /** k - 1, in the bits of an exponent. */
  readonly shifted: Vector;
}

/** Reduces x, which must not lie far beyond the bounds where e^x is finite. */
export function reduce(w: FunctionWriter, x: Vector): Reduction {
  const shift = w.constant(roundingShift - 1);
  const shifted = w.let(v.add(v.multiply(x, w.constant(log2e)), shift));
  const k = w.let(v.subtract(shifted, shift));
  const r = w.let(v.subtract(v.subtract(x, v.multiply(k, w.constant(ln2High))), v.multiply(k, w.constant(ln2Low))));
  const square = w.let(v.multiply(r, r));
  const less = w.let(v.add(r, v.multiply(square, polynomial(w, r, exponential, square))));
  return { less, shifted: w.let(v.shiftLeft(shifted, 52)) };
}

/** x held to where `reduce` works above; what lies too low is masked by its users. NaN stays NaN. */
export function holdExponent(w: FunctionWriter, x: Vector): Vector {
  return w.let(v.lesser(x, w.constant(710)));
}

/** e^x; 0 below the smallest number of full precision. */
export function exp(w: FunctionWriter, x: Vector, { less, shifted } = reduce(w, holdExponent(w, x))): Vector {
  // Half the value, doubled last: the doubling overflows as it should.
  const half = w.let(v.addBits(v.add(w.constant(1), less), shifted));
  return w.let(v.andNot(v.add(half, half), v.less(x, w.constant(lowest))));
}

/** 2^x; 0 below the smallest number of full precision. */
export function exp2(w: FunctionWriter, x: Vector): Vector {
  const shift = w.constant(roundingShift - 1);
  const held = w.let(v.lesser(x, w.constant(1025)));
  const shifted = w.let(v.add(held, shift));
  const r = w.let(v.subtract(held, v.subtract(shifted, shift)));
  const value = v.add(w.constant(1), v.multiply(r, polynomial(w, r, exponential2)));
  const half = w.let(v.addBits(value, v.shiftLeft(shifted, 52)));
  return w.let(v.andNot(v.add(half, half), v.less(x, w.constant(-1021.5))));
}

/** e^x - 1, exact relative to itself also near 0. */
export function expm1(w: FunctionWriter, x: Vector, { less, shifted } = reduce(w, holdExponent(w, x))): Vector {
  const scale = w.let(v.addBits(w.constant(1), shifted));
  const half = w.let(v.add(v.multiply(scale, less), v.subtract(scale, w.constant(0.5))));
  return w.let(v.select(v.less(x, w.constant(-600)), w.constant(-1), v.add(half, half)));
}

/** e^-|u| - 1 and e^-|u|, both exact relative to themselves: what hyperbolic functions are made of. */
export interface Decay {
  readonly sign: Vector;
  readonly less: Vector;
  readonly value: Vector;
  /** 1 / (1 + e^-2|u|) */
  readonly share: Vector;
}

export function decay(w: FunctionWriter, u: Vector): Decay {
  const { less, shifted } = reduce(w, w.let(v.greater(v.negate(v.abs(u)), w.constant(lowest))));
  const scale = w.let(v.addBits(w.constant(2), shifted));
  const part = w.let(v.multiply(scale, less));
  const value = w.let(v.add(scale, part));
  return {
    sign: w.let(v.and(u, w.constant(-0))),
    less: w.let(v.add(part, v.subtract(scale, w.constant(1)))),
    value,
    share: w.let(v.divide(w.constant(1), v.add(w.constant(1), v.multiply(value, value)))),
  };
}

export function tanh(w: FunctionWriter, { sign, less, share }: Decay): Vector {
  const size = v.multiply(v.multiply(less, v.add(w.constant(2), less)), share);
  return w.let(v.xor(v.negate(size), sign));
}

export function sech(w: FunctionWriter, { value, share }: Decay): Vector {
  return w.let(v.multiply(v.add(value, value), share));
}

/** sinh or cosh; e^|u|/2 in two factors where e^|u| alone would overflow. */
export function hyperbolic(w: FunctionWriter, name: 'sinh' | 'cosh', u: Vector): Vector {
  const { sign, less, value } = decay(w, u);
  const twice = v.add(value, value);
  const square = v.multiply(value, value);
  const near = name === 'cosh' ? v.divide(v.add(w.constant(1), square), twice) : v.negate(v.divide(v.multiply(less, v.add(w.constant(2), less)), twice));
  const root = exp(w, w.let(v.multiply(v.abs(u), w.constant(0.5))));
  const far = v.multiply(v.multiply(root, w.constant(0.5)), root);
  const size = v.select(v.greaterThan(v.abs(u), w.constant(700)), far, near);
  return w.let(name === 'cosh' ? size : v.xor(size, sign));
}
