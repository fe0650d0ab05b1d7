import { vector as v, type Vector } from './code.ts';
import type { FunctionWriter } from './function.ts';

/** Σ c_k x^k, x² given where it is known; even and odd powers side by side: two short chains are faster than one long. */
export function polynomial(w: FunctionWriter, x: Vector, coefficients: readonly number[], square = w.let(v.multiply(x, x))): Vector {
  const half = (first: number): Vector => {
    const list = coefficients.filter((_, k) => k % 2 === first);
    return list.reduceRight<Vector | undefined>((sum, c) => (sum ? v.add(v.multiply(sum, square), w.constant(c)) : w.constant(c)), undefined) ?? w.constant(0);
  };
  return v.add(half(0), v.multiply(half(1), x));
}
