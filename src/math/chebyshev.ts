/** The `count` extrema cos(pi j/(count - 1)) of a Chebyshev polynomial, from 1 down to -1. */
export function chebyshevNodes(count: number): Float64Array {
  const last = count - 1;
  return Float64Array.from({ length: count }, (_, j) => Math.sin((Math.PI * (last - 2 * j)) / (2 * last)));
}

/**
 * The matrix [m * count + j] that turns values at `chebyshevNodes(count)` into the coefficients of
 * T_0 … T_count-1 of the polynomial through them (Trefethen 2013, ch. 3 and 4).
 */
export function chebyshevTransform(count: number): Float64Array {
  const last = count - 1;
  const matrix = new Float64Array(count * count);
  const halved = (k: number): number => (k === 0 || k === last ? 0.5 : 1);
  for (let m = 0; m < count; m++) {
    for (let j = 0; j < count; j++) {
      // Whole turns are taken off first: cosines of large angles lose digits.
      matrix[m * count + j] = (2 / last) * halved(m) * halved(j) * Math.cos((Math.PI * ((m * j) % (2 * last))) / last);
    }
  }
  return matrix;
}

/** T_0 … T_count-1 at x in [-1, 1]. */
export function chebyshevAt(x: number, count: number): Float64Array {
  const values = new Float64Array(count);
  for (let m = 0; m < count; m++) values[m] = m === 0 ? 1 : m === 1 ? x : 2 * x * values[m - 1] - values[m - 2];
  return values;
}

/** The Lagrange polynomials of some nodes at x. */
export function lagrangeAt(x: number, nodes: ArrayLike<number>): Float64Array {
  return Float64Array.from({ length: nodes.length }, (_, j) => {
    let product = 1;
    for (let k = 0; k < nodes.length; k++) if (k !== j) product *= (x - nodes[k]) / (nodes[j] - nodes[k]);
    return product;
  });
}
