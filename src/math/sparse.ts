/** A square matrix that is mostly zero, row by row: entry k of row i, `rowStart[i] <= k < rowStart[i + 1]`. */
export interface SparseMatrix {
  readonly size: number;
  readonly rowStart: Int32Array;
  readonly columns: Int32Array;
  readonly values: Float64Array;
}

/** A matrix from entries in any order; those of one place add. */
export function sparseFromEntries(size: number, rows: ArrayLike<number>, columns: ArrayLike<number>, values: ArrayLike<number>): SparseMatrix {
  const count = new Int32Array(size + 1);
  for (let k = 0; k < rows.length; k++) count[rows[k] + 1]++;
  for (let i = 0; i < size; i++) count[i + 1] += count[i];
  const order = new Int32Array(rows.length);
  const next = count.slice(0, size);
  for (let k = 0; k < rows.length; k++) order[next[rows[k]]++] = k;
  // Merge within each row, columns ascending.
  const rowStart = new Int32Array(size + 1);
  const mergedColumns = new Int32Array(rows.length);
  const mergedValues = new Float64Array(rows.length);
  let used = 0;
  for (let i = 0; i < size; i++) {
    const own = order.subarray(count[i], count[i + 1]).sort((a, b) => columns[a] - columns[b]);
    for (const k of own) {
      if (used > rowStart[i] && mergedColumns[used - 1] === columns[k]) mergedValues[used - 1] += values[k];
      else {
        mergedColumns[used] = columns[k];
        mergedValues[used++] = values[k];
      }
    }
    rowStart[i + 1] = used;
  }
  return { size, rowStart, columns: mergedColumns.slice(0, used), values: mergedValues.slice(0, used) };
}

/** Matrix times vector. */
export function multiplySparse({ size, rowStart, columns, values }: SparseMatrix, x: Float64Array): Float64Array {
  const y = new Float64Array(size);
  for (let i = 0; i < size; i++) {
    let sum = 0;
    for (let k = rowStart[i]; k < rowStart[i + 1]; k++) sum += values[k] * x[columns[k]];
    y[i] = sum;
  }
  return y;
}

/** How far entries lie below and above the diagonal. */
export function bandOf({ size, rowStart, columns }: SparseMatrix): { readonly below: number; readonly above: number } {
  let [below, above] = [0, 0];
  for (let i = 0; i < size; i++) {
    for (let k = rowStart[i]; k < rowStart[i + 1]; k++) {
      below = Math.max(below, i - columns[k]);
      above = Math.max(above, columns[k] - i);
    }
  }
  return { below, above };
}
