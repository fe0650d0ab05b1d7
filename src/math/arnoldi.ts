import { EigenvalueDecomposition, Matrix } from 'ml-matrix';

/** An approximate eigenpair of a linear map; a complex pair is given once, with `imaginary` > 0. */
export interface RitzPair {
  readonly real: number;
  readonly imaginary: number;
  /** Real and imaginary part of the eigenvector, together of unit length. */
  readonly vector: readonly [Float64Array, Float64Array];
  /** ‖map(v) - value·v‖ for that vector. */
  readonly residual: number;
}

/**
 * Approximate eigenpairs of a real linear map from its Krylov space of `steps` vectors, the largest
 * |value| first (Arnoldi 1951; Gram-Schmidt done twice).
 */
export function arnoldi(apply: (x: Float64Array) => Float64Array, start: Float64Array, steps: number): RitzPair[] {
  const basis = [scaled(start, 1 / length(start))];
  const h = Matrix.zeros(steps, steps);
  let used = 0;
  let tail = 0;
  for (; used < steps; ) {
    const next = apply(basis[used]);
    const before = length(next);
    for (let pass = 0; pass < 2; pass++) {
      for (let i = 0; i <= used; i++) {
        const share = dot(basis[i], next);
        h.set(i, used, h.get(i, used) + share);
        for (let k = 0; k < next.length; k++) next[k] -= share * basis[i][k];
      }
    }
    tail = length(next);
    used++;
    // The space is closed: its pairs are exact.
    if (tail <= 1e-13 * before) break;
    if (used === steps) break;
    h.set(used, used - 1, tail);
    basis.push(scaled(next, 1 / tail));
  }
  return ritzPairs(h.subMatrix(0, used - 1, 0, used - 1), basis, tail);
}

function ritzPairs(h: Matrix, basis: readonly Float64Array[], tail: number): RitzPair[] {
  const { realEigenvalues, imaginaryEigenvalues, eigenvectorMatrix } = new EigenvalueDecomposition(h, { assumeSymmetric: false });
  const pairs = realEigenvalues.flatMap((real, j): RitzPair[] => {
    const imaginary = imaginaryEigenvalues[j];
    // Columns j and j + 1 are the parts of the eigenvector of the first of a complex pair.
    if (imaginary < 0) return [];
    const parts = [eigenvectorMatrix.getColumn(j), imaginary > 0 ? eigenvectorMatrix.getColumn(j + 1) : h.getColumn(0).fill(0)];
    const norm = Math.hypot(...parts.flat());
    const vector = parts.map((part) => combine(basis, part, 1 / norm)) as [Float64Array, Float64Array];
    const residual = (Math.abs(tail) * Math.hypot(...parts.map((part) => part[part.length - 1]))) / norm;
    return [{ real, imaginary, vector, residual }];
  });
  return pairs.sort((a, b) => Math.hypot(b.real, b.imaginary) - Math.hypot(a.real, a.imaginary));
}

function combine(basis: readonly Float64Array[], weights: readonly number[], factor: number): Float64Array {
  const sum = new Float64Array(basis[0].length);
  weights.forEach((weight, j) => {
    for (let k = 0; k < sum.length; k++) sum[k] += factor * weight * basis[j][k];
  });
  return sum;
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let k = 0; k < a.length; k++) sum += a[k] * b[k];
  return sum;
}

function length(a: Float64Array): number {
  return Math.sqrt(dot(a, a));
}

function scaled(a: Float64Array, factor: number): Float64Array {
  return a.map((value) => factor * value);
}
