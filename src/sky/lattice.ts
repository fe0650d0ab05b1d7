/** Nodes of the interpolation in each direction. */
const mostNodes = 6;

/** Nodes of a cell's interpolation along one axis, by index among the nodes of the lattice. */
export interface Stencil {
  /** First node; the others follow. */
  readonly first: number;
  readonly count: number;
  /** [offset * count + node]: weights at whole pixels from the cell's first node to its last. */
  readonly weights: Float64Array;
}

/**
 * Stencils of every cell along an axis whose lattice has nodes at all multiples of `stride` pixels:
 * Lagrange interpolation over the six nodes around the cell, shifted inwards at the ends.
 */
export function stencilsOf(cells: number, stride: number): readonly Stencil[] {
  const nodes = cells + 1;
  const count = Math.min(mostNodes, nodes);
  const shapes = new Map<number, Float64Array>();
  return Array.from({ length: cells }, (_, cell) => {
    const first = Math.min(Math.max(cell - mostNodes / 2 + 1, 0), nodes - count);
    const place = cell - first;
    let weights = shapes.get(place);
    if (!weights) shapes.set(place, (weights = lagrange(count, place, stride)));
    return { first, count, weights };
  });
}

function lagrange(count: number, place: number, stride: number): Float64Array {
  const weights = new Float64Array((stride + 1) * count);
  for (let offset = 0; offset <= stride; offset++) {
    const x = place + offset / stride;
    for (let node = 0; node < count; node++) {
      let weight = 1;
      for (let other = 0; other < count; other++) if (other !== node) weight *= (x - other) / (node - other);
      weights[offset * count + node] = weight;
    }
  }
  return weights;
}

/** A plane of an image, as interpolation sees it. */
export interface Plane {
  readonly values: Float64Array;
  /** Index of its first pixel in `values`. */
  readonly start: number;
  readonly nx: number;
  readonly stride: number;
}

/** The value that a cell's stencils give at an offset (pixels) from its first node. */
export function interpolateAt({ values, start, nx, stride }: Plane, row: Stencil, column: Stencil, rowOffset: number, columnOffset: number): number {
  let sum = 0;
  for (let i = 0; i < row.count; i++) {
    const line = start + (row.first + i) * stride * nx + column.first * stride;
    let along = 0;
    for (let j = 0; j < column.count; j++) along += column.weights[columnOffset * column.count + j] * values[line + j * stride];
    sum += row.weights[rowOffset * row.count + i] * along;
  }
  return sum;
}

const lines = new Float64Array(mostNodes * 65);

/** Writes all pixels of a cell, (stride + 1)², to `into`; strides up to 64. */
export function interpolateCell({ values, start, nx, stride }: Plane, row: Stencil, column: Stencil, into: Float64Array): void {
  const side = stride + 1;
  for (let i = 0; i < row.count; i++) {
    const line = start + (row.first + i) * stride * nx + column.first * stride;
    for (let b = 0; b < side; b++) {
      let along = 0;
      for (let j = 0; j < column.count; j++) along += column.weights[b * column.count + j] * values[line + j * stride];
      lines[i * side + b] = along;
    }
  }
  for (let a = 0; a < side; a++) {
    for (let b = 0; b < side; b++) {
      let sum = 0;
      for (let i = 0; i < row.count; i++) sum += row.weights[a * row.count + i] * lines[i * side + b];
      into[a * side + b] = sum;
    }
  }
}
