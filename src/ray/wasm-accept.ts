import { float as f, int, vector as v, type Vector } from '../formula/wasm/code.ts';
import type { FunctionWriter } from '../formula/wasm/function.ts';
import type { Callee } from '../formula/wasm/module.ts';
import { emissionBytes, resultsPerFrequency, rotatedBytes, spectrumRecord, type TransferContext } from './wasm-layout.ts';
import { dot, loadNodes, nodeBytes, pairOffsets, sumLanes, zero, type NodeValues } from './wasm-nodes.ts';
import type { Resolve } from './wasm-resolve.ts';

/** The sums of a ray: emptied before it, added to by panels, written out behind it. */
export interface Sums {
  readonly clear: Callee;
  /** (half): adds the panel at hand and moves on behind it. */
  readonly accept: Callee;
  /** (results): writes all but depth and samples. */
  readonly write: Callee;
}

/** Sums per frequency, each two lanes wide: Q, U, z times both, and I where gas absorbs. */
const frequencyBytes = 80;
/** Sums per emission group: I where nothing absorbs it, and the emitted polarization. */
const groupBytes = 32;

/** Writes the summing of `accept` of RayTracer; rotated emission that the test has left is not made again. */
export function writeAccept(context: TransferContext, { rotate, rotated, squaredErrors }: Resolve): Sums {
  const { module, layout, spectrum, structure } = context;
  const { groupOf, tested } = structure;
  const groups = Math.max(...groupOf) + 1;
  const frequencySums = module.reserve(frequencyBytes * groupOf.length);
  const groupSums = module.reserve(groupBytes * groups);
  const scratch = module.reserve(rotatedBytes(structure));
  const clear = module.define([], [], (w) => {
    const empty = w.constant(0);
    w.count(zero, int.constant(frequencyBytes * groupOf.length), 16, (offset) => w.store(offset, frequencySums, empty));
    w.count(zero, int.constant(groupBytes * groups), 16, (offset) => w.store(offset, groupSums, empty));
    for (const address of squaredErrors) w.store(zero, address, f.constant(0));
  });

  const accept = module.define(['f64'], [], (w) => {
    const half = w.parameter(0, 'f64');
    const halves = w.let(v.splat(half));
    const weights = pairOffsets.map((pair) => w.let(v.multiply(halves, v.load(zero, layout.weights + pair))));
    const z = loadNodes(w, layout.z);
    for (let group = 0; group < groups; group++) {
      const [total, major, minor] = [0, 1, 2].map((k) => loadNodes(w, layout.emission + emissionBytes * group + nodeBytes * k));
      const sizes = major.map((c, k) => v.sqrt(v.add(v.multiply(c, c), v.multiply(minor[k], minor[k]))));
      if (!structure.hasAbsorption) addTo(w, groupSums + groupBytes * group, dot(weights, total));
      addTo(w, groupSums + groupBytes * group + 16, dot(weights, sizes));
    }
    tested.forEach((k, slot) => {
      addFrequency(w, zero, frequencySums + frequencyBytes * k, weights, z, partsAt(w, rotated[slot], structure));
    });
    for (const [from, to] of untestedRuns(groupOf, tested)) {
      const emission = int.constant(layout.emission + emissionBytes * groupOf[from]);
      w.count(int.constant(from), int.constant(to), 1, (k) => {
        const record = w.let(int.multiply(k, int.constant(spectrumRecord.bytes)));
        const [turn, damping, opacity] = [spectrumRecord.turn, spectrumRecord.damping, spectrumRecord.opacity].map((place) => f.load(record, spectrum + place));
        w.run(rotate, turn, damping, opacity, emission, int.constant(scratch));
        addFrequency(w, w.let(int.multiply(k, int.constant(frequencyBytes))), frequencySums, weights, z, partsAt(w, scratch, structure));
      });
    }
    const integrals: [number, typeof layout.nearPhi][] = [[layout.faraday, layout.nearPhi]];
    if (structure.hasDispersion) integrals.push([layout.dispersion, layout.nearSigma]);
    if (structure.hasAbsorption) integrals.push([layout.gas, layout.nearMeasure]);
    for (const [values, cell] of integrals) cell.set(w, f.add(cell.get(), sumLanes(w, dot(weights, loadNodes(w, values)))));
  });

  const write = module.define(['i32'], [], (w) => {
    const results = w.parameter(0, 'i32');
    groupOf.forEach((group, k) => {
      const start = 8 * resultsPerFrequency * k;
      const sum = (address: number) => sumLanes(w, v.load(zero, address));
      const own = frequencySums + frequencyBytes * k;
      const shared = groupSums + groupBytes * group;
      [structure.hasAbsorption ? own + 64 : shared, own, own + 16, own + 32, own + 48, shared + 16].forEach((address, index) => w.store(results, start + 8 * index, sum(address)));
      const slot = tested.indexOf(k);
      w.store(results, start + 48, slot < 0 ? f.constant(0) : f.sqrt(f.load(zero, squaredErrors[slot])));
    });
  });
  return { clear, accept, write };
}

/** Runs [from, to) of frequencies that are not tested and share an emission group. */
function untestedRuns(groupOf: readonly number[], tested: readonly number[]): readonly (readonly [number, number])[] {
  const runs: [number, number][] = [];
  groupOf.forEach((group, k) => {
    if (tested.includes(k)) return;
    const last = runs.at(-1);
    if (last && last[1] === k && groupOf[last[0]] === group) last[1]++;
    else runs.push([k, k + 1]);
  });
  return runs;
}

function addTo(w: FunctionWriter, address: number, value: Vector): void {
  w.store(zero, address, v.add(v.load(zero, address), value));
}

/** What `rotate` has left at an address: real, imaginary, and where gas absorbs the unpolarized emission that comes through. */
function partsAt(w: FunctionWriter, address: number, { hasAbsorption }: TransferContext['structure']): readonly NodeValues[] {
  return (hasAbsorption ? [0, 1, 2] : [0, 1]).map((part) => loadNodes(w, address + nodeBytes * part));
}

/** Adds a frequency's rotated emission to its sums. */
function addFrequency(w: FunctionWriter, offset: typeof zero, address: number, weights: NodeValues, z: NodeValues, [real, imaginary, ...through]: readonly NodeValues[]): void {
  const weighted = [real, imaginary].map((part) => part.map((value, k) => w.let(v.multiply(value, weights[k]))));
  const sums = [...weighted.map((part) => part.reduce((sum, value) => v.add(sum, value))), ...weighted.map((part) => dot(part, z)), ...through.map((part) => dot(part, weights))];
  sums.forEach((sum, index) => w.store(offset, address + 16 * index, v.add(v.load(offset, address + 16 * index), sum)));
}
