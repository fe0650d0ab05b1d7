import { gridArray } from './shared-array.ts';
import { solveSplineLine, type AxisEnds } from './spline-line.ts';

/** One axis of a grid of B-spline coefficients. */
export interface GridAxis {
  /** Samples along the axis: coordinate 0 is the first, `points` - 1 the last. */
  readonly points: number;
  /** Whether sample `points` is sample 0 again; elsewhere coordinates are held to [-1, points]. */
  readonly periodic: boolean;
}

/**
 * A function of two or three coordinates as a tensor product of cubic B-splines (Unser 1999, eq.
 * 12): twice continuously differentiable, its derivatives those of the polynomials. Coordinates
 * count samples. Coefficients [..][..][last axis], with those beyond the ends beside them, so that
 * reading needs no case distinctions: see `storedPoints`. Grids of two axes hold 64 bits, of three
 * 32: what is rounded are the coefficients, so that derivatives still fit one another exactly.
 */
export interface SplineGrid {
  /** Tells contents apart: grids of equal keys are equal. */
  readonly key: string;
  readonly axes: readonly GridAxis[];
  readonly coefficients: Float32Array | Float64Array;
}

/** Highest derivative along one axis that is not 0 everywhere. */
export const highestOrder = 3;

/** Coefficients kept along an axis: one before and two behind a period, or two before and behind the samples. */
export function storedPoints({ points, periodic }: GridAxis): number {
  return points + (periodic ? 3 : 4);
}

/** Place of sample 0 among the coefficients of an axis. */
export function firstSample({ periodic }: GridAxis): number {
  return periodic ? 1 : 2;
}

/**
 * How the coordinate u of an axis becomes a cell: v = u + shift - wrap floor(u inverse), held to
 * [0, last + 1]; its whole part, at most `last`, is the first of the four coefficients.
 */
export interface AxisReading {
  readonly shift: number;
  readonly wrap: number;
  readonly inverse: number;
  readonly last: number;
}

/** How an axis is read. */
export function axisReading({ points, periodic }: GridAxis): AxisReading {
  return periodic ? { shift: 0, wrap: points, inverse: 1 / points, last: points - 1 } : { shift: 1, wrap: 0, inverse: 0, last: points };
}

/** Coefficients to step over for one step along each axis. */
export function gridStrides({ axes }: Pick<SplineGrid, 'axes'>): readonly number[] {
  const strides = axes.map(() => 1);
  for (let k = axes.length - 2; k >= 0; k--) strides[k] = strides[k + 1] * storedPoints(axes[k + 1]);
  return strides;
}

/** Empty coefficients for axes: in shared memory where the host has it. */
export function makeCoefficients(axes: readonly GridAxis[]): Float32Array | Float64Array {
  return gridArray(axes.length === 3 ? 32 : 64, axes.reduce((product, axis) => product * storedPoints(axis), 1));
}

/**
 * The spline through samples [..][..][last axis], one end condition per axis. Throws RangeError
 * where samples do not fit the shape, or an axis is too short.
 */
export function interpolateGrid(key: string, values: ArrayLike<number>, shape: readonly number[], ends: readonly AxisEnds[]): SplineGrid {
  if (values.length !== shape.reduce((product, points) => product * points, 1)) throw new RangeError(`${values.length} samples are no grid of ${shape.join(' x ')}`);
  const axes = shape.map((points, k): GridAxis => ({ points, periodic: ends[k] === 'periodic' }));
  const grid = { key, axes, coefficients: makeCoefficients(axes) };
  const strides = gridStrides(grid);
  const { coefficients } = grid;
  const start = axes.reduce((sum, axis, k) => sum + firstSample(axis) * strides[k], 0);
  eachLine(shape, strides, axes.length - 1, start, (at, row) => {
    const points = shape[shape.length - 1];
    for (let k = 0; k < points; k++) coefficients[at + k] = values[row * points + k];
  });
  solveAxes(grid, ends);
  return grid;
}

/** Turns samples in their places into coefficients, axis by axis, ends included. */
function solveAxes({ axes, coefficients }: SplineGrid, ends: readonly AxisEnds[]): void {
  const strides = gridStrides({ axes });
  axes.forEach((axis, k) => {
    const line = new Float64Array(storedPoints(axis));
    const solve = solveSplineLine(axis.points, ends[k]);
    const first = firstSample(axis);
    const others = axes.map((other, j) => (j < k ? storedPoints(other) : other.points));
    const start = axes.reduce((sum, other, j) => (j < k ? sum : sum + firstSample(other) * strides[j]), 0);
    eachLine(others, strides, k, start, (at) => {
      for (let i = 0; i < axis.points; i++) line[first + i] = coefficients[at + i * strides[k]];
      solve(line, first);
      const from = at - first * strides[k];
      for (let i = 0; i < line.length; i++) coefficients[from + i * strides[k]] = line[i];
    });
  });
}

/** Calls `take` with the place of the first sample of every line along an axis, and the line's number. */
function eachLine(counts: readonly number[], strides: readonly number[], along: number, start: number, take: (at: number, line: number) => void): void {
  const others = counts.map((_, k) => k).filter((k) => k !== along);
  const [a, b] = others.length === 2 ? others : [others[0], undefined];
  let line = 0;
  for (let i = 0; i < counts[a]; i++) {
    for (let j = 0; j < (b === undefined ? 1 : counts[b]); j++) take(start + i * strides[a] + (b === undefined ? 0 : j * strides[b]), line++);
  }
}

const scratch = [new Float64Array(4), new Float64Array(4), new Float64Array(4)] as const;

/** Value, or derivatives of the given orders (0 to 3 along each axis), at a point counted in samples. */
export function evaluateGrid(grid: SplineGrid, orders: readonly number[], u: number, v: number, w = 0): number {
  const { axes, coefficients } = grid;
  const isFlat = axes.length === 2;
  const strideV = isFlat ? 1 : storedPoints(axes[2]);
  const strideU = strideV * storedPoints(axes[1]);
  let at = locate(axes[0], orders[0], u, scratch[0]) * strideU + locate(axes[1], orders[1], v, scratch[1]) * strideV;
  if (!isFlat) at += locate(axes[2], orders[2], w, scratch[2]);
  const [first, second, third] = scratch;
  let sum = 0;
  for (let i = 0; i < 4; i++, at += strideU) {
    let plane = 0;
    for (let j = 0; j < 4; j++) {
      const row = at + j * strideV;
      const value = isFlat
        ? coefficients[row]
        : third[0] * coefficients[row] + third[1] * coefficients[row + 1] + third[2] * coefficients[row + 2] + third[3] * coefficients[row + 3];
      plane += second[j] * value;
    }
    sum += first[i] * plane;
  }
  return sum;
}

/** The first coefficient that counts at a coordinate, and the weights of four. */
function locate(axis: GridAxis, order: number, u: number, weights: Float64Array): number {
  const { points, periodic } = axis;
  const last = periodic ? points - 1 : points;
  const moved = periodic ? u - points * Math.floor(u * (1 / points)) : u + 1;
  const held = Math.max(0, Math.min(last + 1, moved));
  const cell = Math.min(last, Math.floor(held));
  splineWeights(order, held - cell, weights);
  return cell;
}

/** Weights of four coefficients at the share t of a cell: of the cubic B-spline or a derivative of it. */
function splineWeights(order: number, t: number, weights: Float64Array): void {
  const rest = 1 - t;
  switch (order) {
    case 0:
      weights[0] = (rest * rest * rest) / 6;
      weights[1] = 2 / 3 + t * t * (t / 2 - 1);
      weights[2] = 2 / 3 + rest * rest * (rest / 2 - 1);
      weights[3] = (t * t * t) / 6;
      return;
    case 1:
      weights[0] = -(rest * rest) / 2;
      weights[1] = t * (1.5 * t - 2);
      weights[2] = -rest * (1.5 * rest - 2);
      weights[3] = (t * t) / 2;
      return;
    case 2:
      weights[0] = rest;
      weights[1] = 3 * t - 2;
      weights[2] = 3 * rest - 2;
      weights[3] = t;
      return;
    default:
      weights[0] = -1;
      weights[1] = 3;
      weights[2] = -3;
      weights[3] = 1;
  }
}
