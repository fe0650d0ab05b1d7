import { placeGrids, type PlacedGrids } from '../formula/wasm/grid.ts';
import { placeTables } from '../formula/wasm/kernel.ts';
import { ensureMemory } from '../formula/wasm/memory.ts';
import type { TangentInputs, TangentIntegrand } from './tangent-integrand.ts';
import type { TangentSums } from './tangent-sums.ts';
import { crossingRecord, type PlacedTangents } from './wasm-tangent.ts';

/** Writes the run-time inputs of a tangent transfer to memory from `address` on; returns the first free address. */
export function placeTangentInputs(memory: WebAssembly.Memory, { placed }: PlacedTangents, inputs: TangentInputs, address: number, placedGrids: PlacedGrids): number {
  const tablesEnd = placeTables(memory, placed.tables, placed.tableOrders, inputs.tables, address);
  const free = placeGrids(memory, placed.grids, inputs.grids, tablesEnd, placedGrids);
  ensureMemory(memory, free);
  new Float64Array(memory.buffer).set(inputs.parameters, placed.parameters / 8);
  return free;
}

/** Bytes of the crossings of one ray. */
export function crossingBytes({ surfaces }: TangentInputs, parameters: number): number {
  return 8 + surfaces.most * (crossingRecord.rates + 8 * parameters);
}

/** Writes the crossings of rays, pairs (major, minor), from `address` on: room for one record more is there. */
export function placeCrossings(memory: WebAssembly.Memory, tangents: PlacedTangents, inputs: TangentInputs, parameters: number, rays: Float64Array, address: number): void {
  const stride = crossingBytes(inputs, parameters);
  const numbers = new Float64Array(memory.buffer);
  const whole = new Int32Array(memory.buffer);
  whole[tangents.crossings.address / 4] = address;
  whole[tangents.stride.address / 4] = stride;
  for (let ray = 0; ray < rays.length / 2; ray++) {
    let at = (address + stride * ray) / 8;
    const crossings = inputs.surfaces.most === 0 ? [] : inputs.surfaces.crossings(rays[2 * ray], rays[2 * ray + 1]);
    numbers[at++] = crossings.length;
    for (const { s, before, behind, rates } of crossings) {
      numbers.set([s, before ? -1 : 0, behind ? 1 : 0], at);
      numbers.set(rates, at + crossingRecord.rates / 8);
      at += crossingRecord.rates / 8 + parameters;
    }
  }
}

/** Reads the derivatives of a ray whose results begin at `at`. */
export function readTangents(numbers: Float64Array, at: number, { parameters, groupOf, groups }: TangentIntegrand, sums: TangentSums): void {
  const count = parameters.length;
  const totals = at + 2 * count * groupOf.length;
  for (let p = 0; p < count; p++) {
    groupOf.forEach((group, k) => {
      const index = p * groupOf.length + k;
      sums.cosine[index] = numbers[at + 2 * (k * count + p)];
      sums.sine[index] = numbers[at + 2 * (k * count + p) + 1];
      sums.total[index] = numbers[totals + group * count + p];
    });
    sums.faradayDepth[p] = numbers[totals + groups * count + p];
  }
}
