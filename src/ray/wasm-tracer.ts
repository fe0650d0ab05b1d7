import { placeGrids, type PlacedGrids } from '../formula/wasm/grid.ts';
import { placeTables } from '../formula/wasm/kernel.ts';
import { ensureMemory } from '../formula/wasm/memory.ts';
import { thermalEmission, type FreeFree } from './free-free.ts';
import type { Integrand, IntegrandInputs } from './integrand.ts';
import type { RayGeometry } from './path.ts';
import { mostHidden, panelLimit, testedFrequencies, type Accuracy, valleyShare } from './accuracy.ts';
import type { RaySums } from './ray-sums.ts';
import { resultsPerFrequency, spectrumRecord } from './wasm-layout.ts';
import type { TangentInputs, TangentIntegrand } from './tangent-integrand.ts';
import type { TangentSums } from './tangent-sums.ts';
import { crossingBytes, placeCrossings, placeTangentInputs, readTangents } from './wasm-tangent-inputs.ts';
import { writeTransfer, type TransferModule } from './wasm-transfer.ts';

/** What a transfer of derivatives takes, and where it leaves those of a ray. */
export interface Derivatives {
  readonly inputs: TangentInputs;
  readonly sums: TangentSums;
}

/** Rays that one call follows. */
const raysPerCall = 256;

/** Follows rays in WebAssembly: what `RayTracer` does in JavaScript, many rays a call. */
export class WasmTransfer {
  private readonly module: TransferModule;
  private readonly memory: WebAssembly.Memory;
  private readonly placedGrids: PlacedGrids = new Map();
  private readonly tangentGrids: PlacedGrids = new Map();
  private readonly run: (rays: number, results: number, count: number, budget: number) => number;

  constructor(
    integrand: Integrand,
    private readonly wavelengthM2: Float64Array,
    private readonly tangents?: TangentIntegrand,
  ) {
    const { program, groupOf, hasDispersion, hasAbsorption } = integrand;
    const tested = testedFrequencies(wavelengthM2, hasDispersion || hasAbsorption);
    this.module = writeTransfer({ program, groupOf, hasDispersion, hasAbsorption, tested }, tangents);
    const instance = new WebAssembly.Instance(new WebAssembly.Module(this.module.bytes));
    this.memory = instance.exports.memory as WebAssembly.Memory;
    this.run = instance.exports.follow as typeof this.run;
  }

  /**
   * Follows rays given as pairs (major, minor), kpc; `take` is called for each, in order, with its
   * sums filled in, and those of `derivatives` where the transfer makes them. Stops behind the ray
   * with which they have taken `budget` samples.
   */
  follow(inputs: IntegrandInputs, geometry: RayGeometry, accuracy: Accuracy, rays: Float64Array, sums: RaySums, take: (ray: number) => void, budget = Infinity, derivatives?: Derivatives): void {
    const { resultLength, tangents } = this.module;
    const ownEnd = this.place(inputs, geometry, accuracy);
    const raysAt = tangents && derivatives ? placeTangentInputs(this.memory, tangents, derivatives.inputs, ownEnd, this.tangentGrids) : ownEnd;
    const resultsAt = raysAt + 16 * raysPerCall;
    const crossingsAt = resultsAt + 8 * resultLength * raysPerCall;
    const parameters = this.tangents?.parameters.length ?? 0;
    ensureMemory(this.memory, crossingsAt + (derivatives ? crossingBytes(derivatives.inputs, parameters) * (raysPerCall + 1) : 0));
    const numbers = new Float64Array(this.memory.buffer);
    const count = rays.length / 2;
    let left = budget;
    for (let from = 0; from < count && left > 0; from += raysPerCall) {
      const here = Math.min(raysPerCall, count - from);
      const these = rays.subarray(2 * from, 2 * (from + here));
      numbers.set(these, raysAt / 8);
      if (tangents && derivatives) placeCrossings(this.memory, tangents, derivatives.inputs, parameters, these, crossingsAt);
      const done = this.run(raysAt, resultsAt, here, left);
      for (let ray = 0; ray < done; ray++) {
        const at = resultsAt / 8 + ray * resultLength;
        this.read(numbers, at, sums, inputs.freeFree);
        if (this.tangents && tangents && derivatives) readTangents(numbers, at + resultLength - tangents.resultLength, this.tangents, derivatives.sums);
        left -= sums.samples;
        take(from + ray);
      }
    }
  }

  /** Writes all that a run has in common to memory; returns the first free address. */
  private place(inputs: IntegrandInputs, geometry: RayGeometry, accuracy: Accuracy): number {
    const { memory, module } = this;
    const { layout, placed } = module;
    let free = placeTables(memory, placed.tables, placed.tableOrders, inputs.tables, module.heapStart);
    free = placeGrids(memory, placed.grids, inputs.grids, free, this.placedGrids);
    const edges = [
      [layout.zEdges, geometry.edges.zKpc],
      [layout.rEdges, geometry.edges.rKpc],
    ] as const;
    for (const [place, values] of edges) {
      ensureMemory(memory, free + 8 * values.length);
      new Float64Array(memory.buffer).set(values, free / 8);
      const whole = new Int32Array(memory.buffer);
      whole[place.count.address / 4] = values.length;
      whole[place.address.address / 4] = free;
      free += 16 * Math.ceil(values.length / 2);
    }
    const numbers = new Float64Array(memory.buffer);
    numbers.set(inputs.parameters, placed.parameters / 8);
    const cells = [
      [layout.sinI, geometry.sinI],
      [layout.cosI, geometry.cosI],
      [layout.radius, geometry.radiusKpc],
      [layout.height, geometry.heightKpc],
      [layout.longestPanel, geometry.longestPanelKpc],
      [layout.hidden, mostHidden * accuracy.tolerance],
      [layout.limit, panelLimit(accuracy.tolerance)],
      [layout.valleyShare, valleyShare(accuracy.tolerance)],
    ] as const;
    for (const [cell, value] of cells) numbers[cell.address / 8] = value;
    this.wavelengthM2.forEach((square, k) => {
      const record = (module.spectrum + spectrumRecord.bytes * k) / 8;
      const { opacity, source } = inputs.freeFree ?? {};
      numbers.set([2 * square, -2 * square * square, accuracy.scaleI[k], accuracy.scaleP[k], -(opacity?.[k] ?? 0), source?.[k] ?? 0], record);
    });
    return free;
  }

  private read(numbers: Float64Array, at: number, sums: RaySums, freeFree: FreeFree | undefined): void {
    const { total, cosine, sine, heightCosine, heightSine, emitted, error } = sums;
    let place = at;
    for (let k = 0; k < total.length; k++, place += resultsPerFrequency) {
      total[k] = numbers[place];
      cosine[k] = numbers[place + 1];
      sine[k] = numbers[place + 2];
      heightCosine[k] = numbers[place + 3];
      heightSine[k] = numbers[place + 4];
      emitted[k] = numbers[place + 5];
      error[k] = numbers[place + 6];
    }
    sums.faradayDepth = numbers[place];
    sums.samples = numbers[place + 1];
    if (freeFree) for (let k = 0; k < total.length; k++) total[k] += thermalEmission(freeFree, k, numbers[place + 2]);
  }
}
