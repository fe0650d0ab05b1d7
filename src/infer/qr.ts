/** The triangle of a QR factorisation of a matrix beside the rotated right-hand side. */
export interface Triangle {
  readonly size: number;
  /** R [row * size + column], upper. */
  readonly R: Float64Array;
  /** First `size` elements of Q^T b. */
  readonly q: Float64Array;
}

/**
 * Householder QR of a matrix given by its columns (each of length m, destroyed) and b (destroyed):
 * |A s + b|^2 = |R s + q|^2 + rest (Golub & Van Loan, Matrix Computations, section 5.2). Fewer rows
 * than columns are allowed; the missing rows of R are zero.
 */
export function triangulate(columns: readonly Float64Array[], b: Float64Array): Triangle {
  const size = columns.length;
  const m = b.length;
  const R = new Float64Array(size * size);
  const q = new Float64Array(size);
  for (let k = 0; k < size && k < m; k++) {
    const v = columns[k];
    let norm = 0;
    for (let i = k; i < m; i++) norm += v[i] * v[i];
    norm = Math.sqrt(norm);
    if (norm > 0) {
      if (v[k] > 0) norm = -norm;
      v[k] -= norm;
      // The reflection is 1 - v v^T / h with h = |v|^2 / 2 = -norm v[k].
      const h = -norm * v[k];
      for (const column of [...columns.slice(k + 1), b]) {
        let dot = 0;
        for (let i = k; i < m; i++) dot += v[i] * column[i];
        const factor = dot / h;
        for (let i = k; i < m; i++) column[i] -= factor * v[i];
      }
    }
    R[k * size + k] = norm;
    for (let j = k + 1; j < size; j++) R[k * size + j] = columns[j][k];
    q[k] = b[k];
  }
  return { size, R, q };
}

/**
 * The step s that minimises |R s + q|^2 + damping sum (scale_i s_i)^2, over the columns in `free`;
 * other elements keep their values in `fixed`.
 */
export function dampedStep(
  triangle: Triangle, damping: number, scale: Float64Array, free: readonly number[], fixed: Float64Array,
): Float64Array {
  const { size, R, q } = triangle;
  const rows = size + free.length;
  const columns = free.map((j, k) => {
    const column = new Float64Array(rows);
    for (let i = 0; i <= j; i++) column[i] = R[i * size + j];
    column[size + k] = Math.sqrt(damping) * scale[j];
    return column;
  });
  const b = new Float64Array(rows);
  b.set(q);
  for (let j = 0; j < size; j++) {
    if (!free.includes(j)) for (let i = 0; i <= j; i++) b[i] += R[i * size + j] * fixed[j];
  }
  const small = triangulate(columns, b);
  const step = Float64Array.from(fixed);
  const count = free.length;
  for (let k = count - 1; k >= 0; k--) {
    let sum = -small.q[k];
    for (let l = k + 1; l < count; l++) sum -= small.R[k * count + l] * step[free[l]];
    const pivot = small.R[k * count + k];
    step[free[k]] = pivot === 0 ? 0 : sum / pivot;
  }
  return step;
}

/** By how much a step lowers the modelled sum of squares: |q|^2 - |R s + q|^2. */
export function modelledFall(triangle: Triangle, step: Float64Array): number {
  const { size, R, q } = triangle;
  let fall = 0;
  for (let i = 0; i < size; i++) {
    let moved = 0;
    for (let j = i; j < size; j++) moved += R[i * size + j] * step[j];
    fall -= moved * (2 * q[i] + moved);
  }
  return fall;
}

/**
 * (R^T R)^-1 over the columns in `free`, size x size with zeros elsewhere; undefined where R is
 * singular to rounding, relative to its column norms.
 */
export function inverseNormal(triangle: Triangle, free: readonly number[]): Float64Array | undefined {
  const { size, R } = triangle;
  const count = free.length;
  const columns = free.map((j) => Float64Array.from({ length: size }, (_, i) => (i <= j ? R[i * size + j] : 0)));
  const norms = columns.map((column) => Math.hypot(...column));
  // Columns of unit length: whether R is singular must not depend on units.
  columns.forEach((column, k) => column.forEach((value, i) => (column[i] = value / (norms[k] || 1))));
  const { R: T } = triangulate(columns, new Float64Array(size));
  const inverse = new Float64Array(count * count);
  for (let c = 0; c < count; c++) {
    if (Math.abs(T[c * count + c]) < 1e-12) return undefined;
    for (let r = c; r >= 0; r--) {
      let sum = r === c ? 1 : 0;
      for (let l = r + 1; l <= c; l++) sum -= T[r * count + l] * inverse[l * count + c];
      inverse[r * count + c] = sum / T[r * count + r];
    }
  }
  const covariance = new Float64Array(size * size);
  for (let a = 0; a < count; a++) {
    for (let b = 0; b < count; b++) {
      let sum = 0;
      for (let l = Math.max(a, b); l < count; l++) sum += inverse[a * count + l] * inverse[b * count + l];
      covariance[free[a] * size + free[b]] = sum / (norms[a] * norms[b]);
    }
  }
  return covariance;
}
