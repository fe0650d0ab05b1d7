/**
 * A smooth function on [0, 1], as Chebyshev polynomials on equal pieces. `coefficients` holds, for
 * order 0 and every derivative wanted, [piece][power]: ordinary powers of t in [-1, 1] in a piece.
 */
export interface Table {
  readonly pieces: number;
  readonly degree: number;
  readonly coefficients: readonly Float64Array[];
}

/** Fits a table to a function on [0, 1]: interpolation at Chebyshev nodes, then powers of t. */
export function makeTable(f: (u: number) => number, pieces = 32, degree = 11, orders = 1): Table {
  const count = degree + 1;
  const first = new Float64Array(pieces * count);
  for (let piece = 0; piece < pieces; piece++) {
    const values = Array.from({ length: count }, (_, k) => {
      const t = Math.cos((Math.PI * (k + 0.5)) / count);
      return f((piece + (t + 1) / 2) / pieces);
    });
    first.set(powersFromValues(values), piece * count);
  }
  const coefficients: Float64Array[] = [first];
  for (let order = 1; order < orders; order++) coefficients.push(slopes(coefficients[order - 1], pieces, count));
  return { pieces, degree, coefficients };
}

/** Value (order 0) or derivative of a tabulated function; arguments outside [0, 1] are clamped. */
export function evaluateTable(table: Table, order: number, u: number): number {
  const { pieces, degree } = table;
  const x = Math.min(Math.max(u, 0), 1) * pieces;
  const piece = Math.min(Math.floor(x), pieces - 1);
  const t = 2 * (x - piece) - 1;
  const c = table.coefficients[order];
  const base = piece * (degree + 1);
  let sum = c[base + degree];
  for (let power = degree - 1; power >= 0; power--) sum = sum * t + c[base + power];
  return sum;
}

/** Values at Chebyshev nodes → coefficients of powers of t. */
function powersFromValues(values: readonly number[]): Float64Array {
  const n = values.length;
  const powers = new Float64Array(n);
  let previous: Float64Array = new Float64Array(n);
  let current: Float64Array = new Float64Array(n);
  current[0] = 1;
  for (let j = 0; j < n; j++) {
    let c = 0;
    for (let k = 0; k < n; k++) c += values[k] * Math.cos((Math.PI * j * (k + 0.5)) / n);
    c *= (j === 0 ? 1 : 2) / n;
    for (let power = 0; power < n; power++) powers[power] += c * current[power];
    // T_{j+1} = 2 t T_j - T_{j-1}, with T_1 = t
    const next = new Float64Array(n);
    for (let power = 1; power < n; power++) next[power] = (j === 0 ? 1 : 2) * current[power - 1];
    if (j > 0) for (let power = 0; power < n; power++) next[power] -= previous[power];
    previous = current;
    current = next;
  }
  return powers;
}

function slopes(coefficients: Float64Array, pieces: number, count: number): Float64Array {
  const result = new Float64Array(coefficients.length);
  for (let piece = 0; piece < pieces; piece++) {
    for (let power = 1; power < count; power++) {
      result[piece * count + power - 1] = 2 * pieces * power * coefficients[piece * count + power];
    }
  }
  return result;
}
