import { vector as v, type Vector } from './code.ts';
import { complementaryError, errorFunction, incompleteGamma } from './coefficients.ts';
import { exp } from './exponential.ts';
import type { FunctionWriter } from './function.ts';
import { polynomial } from './polynomial.ts';

/** The error function: a polynomial up to 1, 1 - e^{-x²}/x times one beyond, 1 from 6 on. */
export function erf(w: FunctionWriter, x: Vector): Vector {
  const size = w.let(v.abs(x));
  const square = w.let(v.multiply(x, x));
  const near = v.multiply(size, polynomial(w, w.let(v.min(square, w.constant(1))), errorFunction));
  const held = w.let(v.max(v.min(size, w.constant(6)), w.constant(1)));
  const t = w.let(v.divide(v.subtract(held, w.constant(2.45)), v.add(held, w.constant(2.45))));
  const decay = exp(w, w.let(v.negate(v.multiply(held, held))));
  const far = v.subtract(w.constant(1), v.multiply(v.divide(decay, held), polynomial(w, t, complementaryError)));
  const value = v.select(v.less(size, w.constant(1)), near, v.select(v.less(size, w.constant(6)), far, v.select(v.equal(x, x), w.constant(1), x)));
  return w.let(v.xor(value, v.and(x, w.constant(-0))));
}

/** 1 - (1 + u) e^-u, by its series near 0. */
export function incompleteGamma2(w: FunctionWriter, u: Vector): Vector {
  const near = v.multiply(v.multiply(u, u), polynomial(w, u, incompleteGamma));
  const decay = exp(w, w.let(v.negate(u)));
  const far = v.subtract(w.constant(1), v.multiply(v.add(w.constant(1), u), decay));
  return w.let(v.select(v.lessOrEqual(v.abs(u), w.constant(0.5)), near, far));
}
