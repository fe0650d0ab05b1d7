import { axisReading, gridStrides, type SplineGrid } from '../../math/spline-grid.ts';
import { float as f, int, vector as v, type Float, type Int, type Vector } from './code.ts';
import type { FunctionWriter } from './function.ts';
import { ensureMemory } from './memory.ts';
import type { Callee, ModuleWriter } from './module.ts';

/** What memory says of an axis: shift, wrap, inverse, last of `AxisReading`, then the stride in bytes as a whole number. */
const axisRecord = { shift: 0, wrap: 8, inverse: 16, last: 24, stride: 32, bytes: 48 } as const;
/** Address of the coefficients, behind three axes. */
const coefficientsPlace = 3 * axisRecord.bytes;
/** Bytes that describe one grid. */
export const gridRecordBytes = coefficientsPlace + 16;

/**
 * A function (record, results, u, v[, w]) that reads a grid at one point: each of the orders wanted
 * is written to results, results + 16, and so on. Grids of two axes hold 64 bits, of three 32.
 */
export function gridReader(module: ModuleWriter, wanted: readonly (readonly number[])[]): Callee {
  const dimensions = wanted[0].length;
  const coordinates = wanted[0].map(() => 'f64' as const);
  return module.once(`grid/${wanted.map((orders) => orders.join('')).join('/')}`, ['i32', 'i32', ...coordinates], [], (w) => {
    const [record, results] = [w.parameter(0, 'i32'), w.parameter(1, 'i32')];
    const start = w.variable('i32', int.load(record, coefficientsPlace));
    const axes = coordinates.map((_, axis) => {
      const { share, offset, stride } = locate(w, record, axis, w.parameter(2 + axis, 'f64'));
      start.set(int.add(start, offset));
      const orders = distinct(wanted.map((list) => list[axis]));
      return { stride, weights: new Map(orders.map((order) => [order, axisWeights(w, order, share)])) };
    });
    const last = axes[dimensions - 1].weights;
    const sums = new Map(distinct(wanted.map(outerKey)).map((key) => [key, zeroPair(w)]));
    readPlanes(w, axes.slice(0, -1), start, dimensions === 3 ? 'singles' : 'doubles', sums);
    wanted.forEach((orders, k) => {
      const [low, high] = sums.get(outerKey(orders)) ?? zeroPair(w);
      const weights = last.get(orders[dimensions - 1]) ?? [];
      const [a, b] = [pairOf(weights[0], weights[1]), pairOf(weights[2], weights[3])];
      const total = w.let(v.add(v.multiply(low, a), v.multiply(high, b)));
      w.store(results, 16 * k, f.add(v.lane(total, 0), v.lane(total, 1)));
    });
  });
}

interface OuterAxis {
  readonly stride: Int;
  /** Four weights by order of derivative. */
  readonly weights: ReadonlyMap<number, readonly Float[]>;
}

/** Four sums along the last axis, two in each vector. */
type Four = readonly [low: Vector, high: Vector];

/** Orders along all axes but the last. */
function outerKey(orders: readonly number[]): string {
  return orders.slice(0, -1).join();
}

function distinct<T>(values: readonly T[]): T[] {
  return [...new Set(values)];
}

/** Fills `sums`, by orders along the outer axes: coefficients times those axes' weights, over 4 or 16 rows. */
function readPlanes(w: FunctionWriter, outer: readonly OuterAxis[], start: Int, kind: 'singles' | 'doubles', sums: Map<string, Four>): void {
  const rows = (at: Int): Four =>
    kind === 'singles' ? [w.let(v.loadSingles(at)), w.let(v.loadSingles(at, 8))] : [w.let(v.load(at)), w.let(v.load(at, 16))];
  const planes = w.variable('i32', start);
  for (let i = 0; i < 4; i++) {
    const inner = new Map<string, Four>();
    if (outer.length === 1) inner.set('', rows(planes));
    else {
      const row = w.variable('i32', planes);
      for (let j = 0; j < 4; j++) {
        const here = rows(row);
        for (const [order, weights] of outer[1].weights) addScaled(w, inner, String(order), here, weights[j], j === 0);
        if (j < 3) row.set(int.add(row, outer[1].stride));
      }
    }
    for (const key of sums.keys()) {
      const [first, second = ''] = key.split(',');
      const part = inner.get(second);
      const weights = outer[0].weights.get(Number(first));
      if (part && weights) addScaled(w, sums, key, part, weights[i], i === 0);
    }
    if (i < 3) planes.set(int.add(planes, outer[0].stride));
  }
}

function addScaled(w: FunctionWriter, sums: Map<string, Four>, key: string, [low, high]: Four, weight: Float, isFirst: boolean): void {
  const factor = w.let(v.splat(weight));
  const scaled: Four = [v.multiply(low, factor), v.multiply(high, factor)];
  const before = sums.get(key);
  sums.set(key, isFirst || !before ? [w.let(scaled[0]), w.let(scaled[1])] : [w.let(v.add(before[0], scaled[0])), w.let(v.add(before[1], scaled[1]))]);
}

function zeroPair(w: FunctionWriter): Four {
  return [w.constant(0), w.constant(0)];
}

function pairOf(first: Float, second: Float): Vector {
  return v.withLane(v.splat(first), 1, second);
}

/** Where a coordinate lies: share of its cell, bytes to the cell's first coefficient, bytes from one to the next. */
function locate(w: FunctionWriter, record: Int, axis: number, u: Float): { share: Float; offset: Int; stride: Int } {
  const read = (place: number): Float => f.load(record, axisRecord.bytes * axis + place);
  const last = w.let(read(axisRecord.last));
  const wrapped = f.multiply(read(axisRecord.wrap), f.floor(f.multiply(u, read(axisRecord.inverse))));
  const moved = f.subtract(f.add(u, read(axisRecord.shift)), wrapped);
  const held = w.let(f.max(f.constant(0), f.min(f.add(last, f.constant(1)), moved)));
  const cell = w.let(f.min(last, f.floor(held)));
  const stride = w.let(int.load(record, axisRecord.bytes * axis + axisRecord.stride));
  return { share: w.let(f.subtract(held, cell)), offset: int.multiply(f.toInt(cell), stride), stride };
}

/** Weights of four coefficients at the share t of a cell: `splineWeights` of math/spline-grid.ts. */
function axisWeights(w: FunctionWriter, order: number, t: Float): readonly Float[] {
  const c = f.constant;
  const rest = w.let(f.subtract(c(1), t));
  const square = (x: Float): Float => f.multiply(x, x);
  const middle = (x: Float): Float => f.add(c(2 / 3), f.multiply(square(x), f.subtract(f.multiply(x, c(0.5)), c(1))));
  const slope = (x: Float): Float => f.multiply(x, f.subtract(f.multiply(x, c(1.5)), c(2)));
  const curvature = (x: Float): Float => f.subtract(f.multiply(c(3), x), c(2));
  const list = [
    () => [f.multiply(f.multiply(square(rest), rest), c(1 / 6)), middle(t), middle(rest), f.multiply(f.multiply(square(t), t), c(1 / 6))],
    () => [f.multiply(square(rest), c(-0.5)), slope(t), f.negate(slope(rest)), f.multiply(square(t), c(0.5))],
    () => [rest, curvature(t), curvature(rest), t],
    () => [c(-1), c(3), c(-3), c(1)],
  ][order]();
  return list.map((weight) => w.let(weight));
}

/** Keys of the grids that lie in a memory, by address, so that the same one is not copied again. */
export type PlacedGrids = Map<number, string>;

/**
 * Copies grids to memory from `address` on, growing it, unless they lie there already, and writes
 * their records; returns the first free address.
 */
export function placeGrids(memory: WebAssembly.Memory, records: number, grids: readonly SplineGrid[], address: number, placed: PlacedGrids): number {
  const before = new Map(placed);
  placed.clear();
  let free = address;
  for (const [index, grid] of grids.entries()) {
    const { coefficients, key } = grid;
    ensureMemory(memory, free + coefficients.byteLength);
    if (before.get(free) !== key) {
      const target = coefficients instanceof Float32Array ? new Float32Array(memory.buffer, free, coefficients.length) : new Float64Array(memory.buffer, free, coefficients.length);
      target.set(coefficients);
    }
    placed.set(free, key);
    writeRecord(memory, records + index * gridRecordBytes, grid, free);
    free += Math.ceil(coefficients.byteLength / 16) * 16;
  }
  return free;
}

function writeRecord(memory: WebAssembly.Memory, record: number, grid: SplineGrid, coefficientsAt: number): void {
  const view = new DataView(memory.buffer);
  const strides = gridStrides(grid);
  grid.axes.forEach((axis, k) => {
    const { shift, wrap, inverse, last } = axisReading(axis);
    const at = record + axisRecord.bytes * k;
    [shift, wrap, inverse, last].forEach((value, place) => view.setFloat64(at + 8 * place, value, true));
    view.setInt32(at + axisRecord.stride, strides[k] * grid.coefficients.BYTES_PER_ELEMENT, true);
  });
  view.setInt32(record + coefficientsPlace, coefficientsAt, true);
}

