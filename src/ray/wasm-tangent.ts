import { float as f, int, vector as v, type Int, type Vector } from '../formula/wasm/code.ts';
import { exp } from '../formula/wasm/exponential.ts';
import type { FunctionWriter } from '../formula/wasm/function.ts';
import type { Callee, ModuleWriter } from '../formula/wasm/module.ts';
import { placeProgram, type PlacedProgram } from '../formula/wasm/program.ts';
import { largestPlainAngle, sineCosine, sineCosinePlain } from '../formula/wasm/trigonometry.ts';
import { tableShape } from './integrand.ts';
import { panelNodes } from './panel.ts';
import { blockSize, place, type TangentIntegrand } from './tangent-integrand.ts';
import { besideSurface } from './tangent-transfer.ts';
import { makeIntCell, spectrumRecord, type IntCell, type TransferLayout } from './wasm-layout.ts';
import { nodeBytes, pairOffsets, sumLanes, zero } from './wasm-nodes.ts';

/** What a transfer calls beside its own work: for every ray, and for every panel that it accepts. */
export interface PanelFollower {
  /** (): computes what does not differ between samples. */
  readonly prepare: Callee;
  /** (): before a ray. */
  readonly begin: Callee;
  /** (a, b): an accepted panel, the nearest first. */
  readonly panel: Callee;
  /** (results): behind the last panel; writes `resultLength` f64. */
  readonly finish: Callee;
  readonly resultLength: number;
}

/** Where a tangent transfer wants its inputs. */
export interface PlacedTangents extends PanelFollower {
  readonly placed: PlacedProgram;
  /** Address of the next ray's crossings: their number as f64, then records; and bytes from ray to ray. */
  readonly crossings: IntCell;
  readonly stride: IntCell;
}

/** f64 of a crossing: s, factors of what is before and behind (-1 or 0, 1 or 0), then one rate per parameter. */
export const crossingRecord = { s: 0, before: 8, behind: 16, rates: 24 } as const;

/** What the parts of the tangent transfer share while they are written. */
interface TangentContext {
  readonly module: ModuleWriter;
  readonly layout: TransferLayout;
  readonly spectrum: number;
  readonly integrand: TangentIntegrand;
  /** Outputs at the nodes, [block][place]. */
  readonly values: number;
  /** φ and Σ at the nodes, then at the near end (both lanes), [block]. */
  readonly phi: number;
  readonly sigma: number;
  readonly nearPhi: number;
  readonly nearSigma: number;
  /** c, s, and real and imaginary emission of a frequency at the nodes. */
  readonly rotated: number;
  /** Two lanes each: of Q and U [frequency][parameter][2], of I [group][parameter]. */
  readonly polarized: number;
  readonly totals: number;
}

/**
 * Writes what `TangentTracer` does, two nodes at a time, to be called by a transfer that keeps the
 * ray at hand in `layout`. Results of a ray: ∂Q, ∂U [frequency][parameter][2], ∂I [group][parameter],
 * ∂(depth) [parameter].
 */
export function writeTangents(module: ModuleWriter, layout: TransferLayout, spectrum: number, integrand: TangentIntegrand): PlacedTangents {
  const count = integrand.parameters.length;
  const { groups, groupOf } = integrand;
  const context: TangentContext = {
    module, layout, spectrum, integrand,
    values: module.reserve(nodeBytes * blockSize(groups) * (count + 1)),
    phi: module.reserve(nodeBytes * (count + 1)),
    sigma: module.reserve(nodeBytes * (count + 1)),
    nearPhi: module.reserve(16 * (count + 1)),
    nearSigma: module.reserve(16 * (count + 1)),
    rotated: module.reserve(4 * nodeBytes),
    polarized: module.reserve(32 * count * groupOf.length),
    totals: module.reserve(16 * count * groups),
  };
  const placed = placeProgram(module, integrand.program, tableShape);
  const crossings = makeIntCell(module);
  const stride = makeIntCell(module);
  const [next, left] = [makeIntCell(module), makeIntCell(module)];
  const sample = writeSample(context, placed);
  const addPanel = writeAddPanel(context, sample);
  const passSurface = writePassSurface(context, sample);
  const recordBytes = crossingRecord.rates + 8 * count;
  const accumulated = [context.nearPhi, 16 * (count + 1), context.nearSigma, 16 * (count + 1), context.polarized, 32 * count * groupOf.length, context.totals, 16 * count * groups];

  const begin = module.define([], [], (w) => {
    const empty = w.constant(0);
    for (let k = 0; k < accumulated.length; k += 2) {
      w.count(zero, int.constant(accumulated[k + 1]), 16, (offset) => w.store(offset, accumulated[k], empty));
    }
    left.set(w, v.laneInt(v.truncate(v.loadSplat(crossings.get())), 0));
    next.set(w, int.add(crossings.get(), int.constant(8)));
    crossings.set(w, int.add(crossings.get(), stride.get()));
  });
  const passAll = (w: FunctionWriter, until: (s: ReturnType<typeof f.load>) => Int): void => {
    w.repeatWhile(() => int.and(int.greaterThan(left.get(), zero), until(f.load(next.get(), crossingRecord.s))), () => {
      w.run(passSurface, next.get());
      next.set(w, int.add(next.get(), int.constant(recordBytes)));
      left.set(w, int.subtract(left.get(), int.constant(1)));
    });
  };
  const panel = module.define(['f64', 'f64'], [], (w) => {
    const [a, b] = [w.parameter(0, 'f64'), w.parameter(1, 'f64')];
    const half = w.let(f.multiply(f.constant(0.5), f.subtract(b, a)));
    const end = w.let(f.subtract(b, f.multiply(f.constant(besideSurface), layout.radius.get())));
    // Addresses beyond the last record are still in memory: reading them is harmless.
    w.when(int.greaterThan(left.get(), zero), () => passAll(w, (s) => f.lessOrEqual(end, s)));
    w.run(addPanel, w.let(f.multiply(f.constant(0.5), f.add(a, b))), half);
  });
  const finish = module.define(['i32'], [], (w) => {
    passAll(w, () => int.constant(1));
    const results = w.parameter(0, 'i32');
    const lists = [[context.polarized, 2 * count * groupOf.length], [context.totals, count * groups]] as const;
    let at = 0;
    for (const [address, length] of lists) {
      w.count(zero, int.constant(length), 1, (k) => {
        const sum = sumLanes(w, v.load(int.shiftLeft(k, int.constant(4)), address));
        w.store(int.add(results, int.shiftLeft(k, int.constant(3))), 8 * at, sum);
      });
      at += length;
    }
    for (let p = 0; p < count; p++) w.store(results, 8 * (at + p), f.load(zero, context.nearPhi + 16 * (p + 1)));
  });
  return { placed, prepare: placed.prepare, begin, panel, finish, crossings, stride, resultLength: count * (2 * groupOf.length + groups + 1) };
}

/** (s, pair): the outputs at two places of the ray, written to a pair of nodes. */
function writeSample({ module, layout, integrand, values }: TangentContext, placed: PlacedProgram): Callee {
  return module.define(['v128', 'i32'], [], (w) => {
    const [s, pair] = [w.parameter(0, 'v128'), w.parameter(1, 'i32')];
    const [sinI, cosI, minorSin, minorCos, major] = [layout.sinI, layout.cosI, layout.minorSin, layout.minorCos, layout.major].map((cell) => cell.both());
    const y = w.let(v.subtract(minorCos, v.multiply(s, sinI)));
    const z = w.let(v.add(minorSin, v.multiply(s, cosI)));
    const outputs = placed.begin(w)([w.let(major), y, z]);
    outputs.forEach((value, k) => {
      if (!isZeroOutput(integrand, k)) w.store(pair, values + nodeBytes * k, value);
    });
  });
}

function isZeroOutput({ isZero, groups }: TangentIntegrand, index: number): boolean {
  const size = blockSize(groups);
  return isZero[Math.floor(index / size)][index % size];
}

/** (centre, half): adds a panel to all sums and moves on behind it. */
function writeAddPanel(context: TangentContext, sample: Callee): Callee {
  const { module, layout, integrand, values } = context;
  const { groups, groupOf, isZero, parameters } = integrand;
  const size = blockSize(groups);
  const at = (block: number, index: number): number => values + nodeBytes * (block * size + index);
  const addFrequency = Array.from({ length: groups }, (_, group) => writeAddFrequency(context, group));
  return module.define(['f64', 'f64'], [], (w) => {
    const [centre, half] = [w.parameter(0, 'f64'), w.let(v.splat(w.parameter(1, 'f64')))];
    const middle = w.let(v.splat(centre));
    w.count(zero, int.constant(nodeBytes), 16, (offset) => w.run(sample, v.add(middle, v.multiply(half, v.load(offset, layout.nodes))), offset));
    const weights = pairOffsets.map((pair) => w.let(v.multiply(half, v.load(zero, layout.weights + pair))));
    const weigh = (address: number): Vector => weights.map((weight, k) => v.multiply(weight, v.load(zero, address + pairOffsets[k]))).reduce((sum, term) => v.add(sum, term));
    const depths = [[place.faraday, context.phi, context.nearPhi], [place.dispersion, context.sigma, context.nearSigma]] as const;
    isZero.forEach((zeros, block) => {
      for (const [index, into, near] of depths) integrateToNodes(w, layout, zeros[index] ? undefined : at(block, index), half, v.load(zero, near + 16 * block), into + nodeBytes * block);
    });
    parameters.forEach((_, p) => {
      for (let group = 0; group < groups; group++) {
        const index = place.emission + 3 * group;
        if (isZero[p + 1][index]) continue;
        const sum = context.totals + 16 * (group * parameters.length + p);
        w.store(zero, sum, v.add(v.load(zero, sum), weigh(at(p + 1, index))));
      }
    });
    for (const [from, to] of runsOf(groupOf)) {
      w.count(int.constant(from), int.constant(to), 1, (k) => w.run(addFrequency[groupOf[from]], k, w.parameter(1, 'f64')));
    }
    isZero.forEach((zeros, block) => {
      for (const [index, , near] of depths) {
        if (zeros[index]) continue;
        const whole = w.let(v.splat(sumLanes(w, weigh(at(block, index)))));
        w.store(zero, near + 16 * block, v.add(v.load(zero, near + 16 * block), whole));
      }
    });
  });
}

/** Cumulative integral at each node; without values what lies nearer alone. */
function integrateToNodes(w: FunctionWriter, layout: TransferLayout, values: number | undefined, half: Vector, near: Vector, into: number): void {
  const nearer = w.let(near);
  const columns = values === undefined ? [] : Array.from({ length: panelNodes }, (_, j) => w.let(v.loadSplat(zero, values + 8 * j)));
  for (const pair of pairOffsets) {
    const terms = columns.map((value, j) => v.multiply(v.load(zero, layout.toNearEnd + nodeBytes * j + pair), value));
    w.store(zero, into + pair, terms.length === 0 ? nearer : v.add(nearer, v.multiply(half, terms.reduce((total, term) => v.add(total, term)))));
  }
}

/** Runs [from, to) of frequencies that share an emission group. */
function runsOf(groupOf: readonly number[]): readonly (readonly [number, number])[] {
  const starts = groupOf.flatMap((group, k) => (k === 0 || groupOf[k - 1] !== group ? [k] : []));
  return starts.map((from, index) => [from, starts[index + 1] ?? groupOf.length]);
}

/** (frequency, half): adds a panel to a frequency's sums. */
function writeAddFrequency(context: TangentContext, group: number): Callee {
  const { module, layout, integrand, values, phi, sigma, rotated } = context;
  const { isZero, parameters, hasDispersion } = integrand;
  const size = blockSize(integrand.groups);
  const emission = (block: number, part: number): number => values + nodeBytes * (block * size + place.emission + 3 * group + part);
  return module.define(['i32', 'f64'], [], (w) => {
    const k = w.parameter(0, 'i32');
    const half = w.let(v.splat(w.parameter(1, 'f64')));
    const { turn, damping } = turnAndDamping(w, context, k);
    const rotateWith = (sineCosineOf: typeof sineCosine): void => {
      w.count(zero, int.constant(nodeBytes), 16, (offset) => {
        const weight = w.let(v.multiply(half, v.load(offset, layout.weights)));
        const [sine, cosine] = sineCosineOf(w, w.let(v.multiply(turn, v.load(offset, phi))));
        const reach = hasDispersion ? w.let(v.multiply(weight, exp(w, w.let(v.multiply(damping, v.load(offset, sigma)))))) : weight;
        const [c, s] = [w.let(v.multiply(reach, cosine)), w.let(v.multiply(reach, sine))];
        const [major, minor] = [1, 2].map((part) => w.let(v.load(offset, emission(0, part))));
        [c, s, v.subtract(v.multiply(c, major), v.multiply(s, minor)), v.add(v.multiply(s, major), v.multiply(c, minor))].forEach((value, index) => {
          w.store(offset, rotated + nodeBytes * index, value);
        });
      });
    };
    const depths = pairOffsets.map((pair) => v.abs(v.load(zero, phi + pair))).reduce((largest, depth) => v.greater(largest, depth));
    w.when(v.anyTrue(v.greaterThan(v.multiply(turn, depths), w.constant(largestPlainAngle))), () => rotateWith(sineCosine), () => rotateWith(sineCosinePlain));
    const sums = w.let(int.multiply(k, int.constant(32 * parameters.length)));
    const [c, s, real, imaginary] = [0, 1, 2, 3].map((index) => pairOffsets.map((pair) => w.let(v.load(zero, rotated + nodeBytes * index + pair))));
    parameters.forEach((_, p) => {
      const block = p + 1;
      const emits = !isZero[block][place.emission + 3 * group + 1] || !isZero[block][place.emission + 3 * group + 2];
      const terms = pairOffsets.map((pair, index): [Vector, Vector] => {
        const angle = w.let(v.multiply(turn, v.load(zero, phi + nodeBytes * block + pair)));
        let [q, u] = [v.negate(v.multiply(angle, imaginary[index])), v.multiply(angle, real[index])];
        if (hasDispersion) {
          const growth = w.let(v.multiply(damping, v.load(zero, sigma + nodeBytes * block + pair)));
          [q, u] = [v.add(q, v.multiply(growth, real[index])), v.add(u, v.multiply(growth, imaginary[index]))];
        }
        if (emits) {
          const [major, minor] = [1, 2].map((part) => w.let(v.load(zero, emission(block, part) + pair)));
          q = v.add(q, v.subtract(v.multiply(c[index], major), v.multiply(s[index], minor)));
          u = v.add(u, v.add(v.multiply(s[index], major), v.multiply(c[index], minor)));
        }
        return [q, u];
      });
      [0, 1].forEach((part) => {
        const address = context.polarized + 32 * p + 16 * part;
        w.store(sums, address, terms.reduce((sum, term) => v.add(sum, term[part]), v.load(sums, address)));
      });
    });
  });
}

function turnAndDamping(w: FunctionWriter, { spectrum }: TangentContext, k: Int): { readonly turn: Vector; readonly damping: Vector } {
  const record = w.let(int.multiply(k, int.constant(spectrumRecord.bytes)));
  const [turn, damping] = [spectrumRecord.turn, spectrumRecord.damping].map((offset) => w.let(v.loadSplat(record, spectrum + offset)));
  return { turn, damping };
}

/** (crossing): takes up the jumps at a surface that moves, seen from both sides at once. */
function writePassSurface(context: TangentContext, sample: Callee): Callee {
  const { module, layout, integrand, values, nearPhi, nearSigma } = context;
  const { parameters, groups, groupOf, hasDispersion } = integrand;
  const count = parameters.length;
  return module.define(['i32'], [], (w) => {
    const record = w.parameter(0, 'i32');
    const aside = f.multiply(f.constant(besideSurface), layout.radius.get());
    const s = w.let(f.load(record, crossingRecord.s));
    w.run(sample, v.withLane(v.splat(f.add(s, aside)), 1, f.subtract(s, aside)), zero);
    const sides = w.let(v.withLane(v.splat(f.load(record, crossingRecord.before)), 1, f.load(record, crossingRecord.behind)));
    const rate = (p: number): Vector => v.loadSplat(record, crossingRecord.rates + 8 * p);
    // Outside the volume formulas may have no value: what is not there counts as 0.
    const jump = (index: number): Vector => {
      const value = w.let(v.load(zero, values + nodeBytes * index));
      return w.let(v.and(v.multiply(sides, value), v.notEqual(sides, w.constant(0))));
    };
    for (let group = 0; group < groups; group++) {
      const total = jump(place.emission + 3 * group);
      const [major, minor] = [jump(place.emission + 3 * group + 1), jump(place.emission + 3 * group + 2)];
      for (let p = 0; p < count; p++) {
        const sum = context.totals + 16 * (group * count + p);
        w.store(zero, sum, v.add(v.load(zero, sum), v.multiply(rate(p), total)));
      }
      for (const [from, to] of runsOf(groupOf).filter(([start]) => groupOf[start] === group)) {
        w.count(int.constant(from), int.constant(to), 1, (k) => {
          const { turn, damping } = turnAndDamping(w, context, k);
          const [sine, cosine] = sineCosine(w, w.let(v.multiply(turn, v.load(zero, nearPhi))));
          const reach = hasDispersion ? exp(w, w.let(v.multiply(damping, v.load(zero, nearSigma)))) : w.constant(1);
          const [c, si] = [w.let(v.multiply(reach, cosine)), w.let(v.multiply(reach, sine))];
          const real = w.let(v.subtract(v.multiply(c, major), v.multiply(si, minor)));
          const imaginary = w.let(v.add(v.multiply(si, major), v.multiply(c, minor)));
          const sums = w.let(int.multiply(k, int.constant(32 * count)));
          for (let p = 0; p < count; p++) {
            [real, imaginary].forEach((part, index) => {
              const address = context.polarized + 32 * p + 16 * index;
              w.store(sums, address, v.add(v.load(sums, address), v.multiply(rate(p), part)));
            });
          }
        });
      }
    }
    for (const [index, near] of [[place.faraday, nearPhi], [place.dispersion, nearSigma]] as const) {
      const whole = w.let(v.splat(sumLanes(w, jump(index))));
      for (let p = 0; p < count; p++) {
        const address = near + 16 * (p + 1);
        w.store(zero, address, v.add(v.load(zero, address), v.multiply(rate(p), whole)));
      }
    }
  });
}
