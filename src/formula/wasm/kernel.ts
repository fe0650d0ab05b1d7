import type { Table } from '../../math/table.ts';
import type { Kernel } from '../javascript.ts';
import type { Program } from '../lower.ts';
import { int, vector as v } from './code.ts';
import { placeGrids, type PlacedGrids } from './grid.ts';
import { ensureMemory } from './memory.ts';
import { ModuleWriter } from './module.ts';
import { placeProgram } from './program.ts';
import type { TableShape } from './table.ts';

/** Samples that one call of the module takes; longer runs are cut. */
const chunk = 256;

/**
 * Writes a program as a WebAssembly module, two samples at a time, behind the same joint as the
 * JavaScript back end. All tables must have the shape given here.
 */
export function compileWasm(program: Program, shape: TableShape = { pieces: 32, degree: 11 }): Kernel {
  const module = new ModuleWriter();
  const placed = placeProgram(module, program, shape);
  const lanes = module.reserve(8 * chunk * program.lanes.length);
  const outputs = module.reserve(8 * chunk * program.outputs.length);
  module.define(
    ['i32'],
    [],
    (w) => {
      w.run(placed.prepare);
      const sample = placed.begin(w);
      w.count(int.constant(0), int.shiftLeft(w.parameter(0, 'i32'), int.constant(3)), 16, (offset) => {
        const values = sample(program.lanes.map((_, k) => w.let(v.load(offset, lanes + 8 * chunk * k))));
        values.forEach((value, k) => w.store(offset, outputs + 8 * chunk * k, value));
      });
    },
    'evaluate',
  );
  const instance = new WebAssembly.Instance(new WebAssembly.Module(module.encode()));
  const memory = instance.exports.memory as WebAssembly.Memory;
  const evaluate = instance.exports.evaluate as (count: number) => void;
  const placedGrids: PlacedGrids = new Map();
  return {
    evaluate: (count, parameters, lanesIn, outputsOut, tables, grids = []) => {
      const free = placeTables(memory, placed.tables, placed.tableOrders, tables, module.heapStart);
      placeGrids(memory, placed.grids, grids, free, placedGrids);
      const numbers = new Float64Array(memory.buffer);
      numbers.set(parameters.subarray(0, program.parameters.length), placed.parameters / 8);
      for (let from = 0; from < count; from += chunk) {
        const to = Math.min(from + chunk, count);
        program.lanes.forEach((_, k) => numbers.set(lanesIn[k].subarray(from, to), lanes / 8 + k * chunk));
        evaluate(to - from);
        program.outputs.forEach((_, k) => outputsOut[k].set(numbers.subarray(outputs / 8 + k * chunk, outputs / 8 + k * chunk + to - from), from));
      }
    },
  };
}

/** Copies tables to memory from `address` on, growing it, and notes where they are; returns the first free address. */
export function placeTables(memory: WebAssembly.Memory, pointers: number, orders: number, tables: readonly Table[], address: number): number {
  let free = address;
  for (const [index, table] of tables.entries()) {
    for (let order = 0; order < Math.min(orders, table.coefficients.length); order++) {
      const coefficients = table.coefficients[order];
      ensureMemory(memory, free + coefficients.byteLength);
      new Float64Array(memory.buffer).set(coefficients, free / 8);
      new Int32Array(memory.buffer)[pointers / 4 + index * orders + order] = free;
      free += Math.ceil(coefficients.byteLength / 16) * 16;
    }
  }
  return free;
}
