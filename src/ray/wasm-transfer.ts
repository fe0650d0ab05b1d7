import { float as f, int, vector as v, type Int, type Vector } from '../formula/wasm/code.ts';
import type { FunctionWriter } from '../formula/wasm/function.ts';
import { ModuleWriter, type Callee } from '../formula/wasm/module.ts';
import { placeProgram, type PlacedProgram } from '../formula/wasm/program.ts';
import { output, tableShape } from './integrand.ts';
import { writeFindBreaks } from './wasm-breaks.ts';
import { emissionBytes, layOut, resultsPerFrequency, spectrumRecord, type TransferLayout, type TransferStructure } from './wasm-layout.ts';
import { writeAccept, type Sums } from './wasm-accept.ts';
import { writeIsResolved } from './wasm-resolve.ts';
import { nodeBytes, pairOffsets, zero } from './wasm-nodes.ts';
import type { TangentIntegrand } from './tangent-integrand.ts';
import { deepestSplit, mostSamples } from './accuracy.ts';
import { writeTangents, type PanelFollower, type PlacedTangents } from './wasm-tangent.ts';
import { panelNodes } from './panel.ts';

/** A module that follows rays, and where it wants its inputs. */
export interface TransferModule {
  readonly bytes: Uint8Array<ArrayBuffer>;
  readonly layout: TransferLayout;
  readonly placed: PlacedProgram;
  readonly spectrum: number;
  /** Derivatives, where they are asked for. */
  readonly tangents?: PlacedTangents;
  /**
   * f64 of one ray's results: 7 per frequency (I, Q, U, heights of Q and U, emitted, error), depth, samples, emission
   * measure; then derivatives.
   */
  readonly resultLength: number;
  readonly heapStart: number;
}

/**
 * Writes the module that follows the rays of a structure: the algorithm of `RayTracer`, two nodes at a
 * time; with `tangents` that of `TangentTracer` on the panels that it accepts.
 */
export function writeTransfer(structure: TransferStructure, tangents?: TangentIntegrand): TransferModule {
  const { program, groupOf } = structure;
  const module = new ModuleWriter();
  const layout = layOut(module, Math.max(...groupOf) + 1);
  const spectrum = module.reserve(spectrumRecord.bytes * groupOf.length);
  const placed = placeProgram(module, program, tableShape);
  const findBreaks = writeFindBreaks(module, layout);
  const sample = writeSample(module, layout, placed, structure);
  const context = { module, layout, spectrum, structure };
  const resolve = writeIsResolved(context);
  const sums = writeAccept(context, resolve);
  const placedTangents = tangents && writeTangents(module, layout, spectrum, tangents);
  const interval = writeInterval(module, layout, sample, resolve.isResolved, sums.accept, placedTangents);
  const ownLength = resultsPerFrequency * groupOf.length + 3;
  const resultLength = ownLength + (placedTangents?.resultLength ?? 0);
  writeFollow(module, layout, { prepare: placed.prepare, findBreaks, interval, sums, ownLength, resultLength, follower: placedTangents });
  return { bytes: module.encode(), layout, placed, spectrum, ...(placedTangents && { tangents: placedTangents }), resultLength, heapStart: module.heapStart };
}

/** (a, b): evaluates the integrand at the nodes of [a, b], and φ, Σ and EM from the observer to each node. */
function writeSample(module: ModuleWriter, layout: TransferLayout, placed: PlacedProgram, { hasDispersion, hasAbsorption }: TransferStructure): Callee {
  return module.define(['f64', 'f64'], [], (w) => {
    const [a, b] = [w.parameter(0, 'f64'), w.parameter(1, 'f64')];
    const half = w.let(v.splat(f.multiply(f.constant(0.5), f.subtract(b, a))));
    const centre = w.let(v.splat(f.multiply(f.constant(0.5), f.add(a, b))));
    const evaluate = placed.begin(w);
    const [sinI, cosI, minorSin, minorCos, major] = [layout.sinI, layout.cosI, layout.minorSin, layout.minorCos, layout.major].map((cell) => w.let(cell.both()));
    w.count(zero, int.constant(nodeBytes), 16, (offset) => {
      const s = w.let(v.add(centre, v.multiply(half, v.load(offset, layout.nodes))));
      const y = w.let(v.subtract(minorCos, v.multiply(s, sinI)));
      const z = w.let(v.add(minorSin, v.multiply(s, cosI)));
      w.store(offset, layout.z, z);
      const values = evaluate([major, y, z]);
      w.store(offset, layout.faraday, values[output.faraday]);
      if (hasDispersion) w.store(offset, layout.dispersion, values[output.dispersion]);
      if (hasAbsorption) w.store(offset, layout.gas, values[output.emissionMeasure]);
      values.slice(output.firstGroup).forEach((density, group) => {
        [output.total, output.cosine, output.sine].forEach((part, k) => {
          w.store(offset, layout.emission + emissionBytes * group + nodeBytes * k, v.multiply(density, values[part]));
        });
      });
    });
    integrateToNodes(w, layout, layout.faraday, half, layout.nearPhi.both(), layout.phi);
    if (hasDispersion) integrateToNodes(w, layout, layout.dispersion, half, layout.nearSigma.both(), layout.sigma);
    if (hasAbsorption) integrateToNodes(w, layout, layout.gas, half, layout.nearMeasure.both(), layout.measure);
  });
}

/** Cumulative integral at each node: what lies nearer, and the panel's part up to there. */
function integrateToNodes(w: FunctionWriter, layout: TransferLayout, values: number, half: Vector, near: Vector, into: number): void {
  const columns = Array.from({ length: panelNodes }, (_, j) => w.let(v.loadSplat(zero, values + 8 * j)));
  for (const pair of pairOffsets) {
    const terms = columns.map((value, j) => v.multiply(v.load(zero, layout.toNearEnd + nodeBytes * j + pair), value));
    const sum = terms.reduce((total, term) => v.add(total, term));
    w.store(zero, into + pair, v.add(near, v.multiply(half, sum)));
  }
}

/** (from, to): integrates between two breaks, nearest panel first, bisecting where needed. */
function writeInterval(module: ModuleWriter, { stack, samples }: TransferLayout, sample: Callee, isResolved: Callee, accept: Callee, follower?: PanelFollower): Callee {
  return module.define(['f64', 'f64'], [], (w) => {
    const address = w.variable('i32');
    w.store(zero, stack, w.parameter(0, 'f64'));
    w.store(zero, stack + 8, w.parameter(1, 'f64'));
    w.store(zero, stack + 16, f.constant(0));
    const record = int.constant(24);
    w.repeatWhile(() => int.and(int.greaterOrEqual(address, zero), f.lessOrEqual(samples.get(), f.constant(mostSamples))), () => {
      const [a, b, depth] = [0, 8, 16].map((offset) => w.let(f.load(address, stack + offset)));
      w.run(sample, a, b);
      samples.set(w, f.add(samples.get(), f.constant(panelNodes)));
      const half = w.let(f.multiply(f.constant(0.5), f.subtract(b, a)));
      const done = w.variable('i32', int.not(f.less(depth, f.constant(deepestSplit))));
      w.when(int.not(done), () => done.set(w.call(isResolved, 'i32', half)));
      w.when(
        done,
        () => {
          if (follower) w.run(follower.panel, a, b);
          w.run(accept, half);
          address.set(int.subtract(address, record));
        },
        () => {
          const middle = w.let(f.multiply(f.constant(0.5), f.add(a, b)));
          const deeper = w.let(f.add(depth, f.constant(1)));
          w.store(address, stack + 8, middle);
          w.store(address, stack + 16, deeper);
          address.set(int.add(address, record));
          w.store(address, stack, middle);
          w.store(address, stack + 8, b);
          w.store(address, stack + 16, deeper);
        },
      );
    });
  });
}

interface FollowParts {
  readonly prepare: Callee;
  readonly findBreaks: Callee;
  readonly interval: Callee;
  readonly sums: Sums;
  /** f64 of a ray's own results, and of all. */
  readonly ownLength: number;
  readonly resultLength: number;
  readonly follower: PanelFollower | undefined;
}

/**
 * Exported (rays, results, count, budget): follows rays, pairs of f64 major and minor, one after the
 * other, until all are done or they have taken as many samples as the budget; returns how many are done.
 */
function writeFollow(module: ModuleWriter, layout: TransferLayout, { prepare, findBreaks, interval, sums, ownLength, resultLength, follower }: FollowParts): void {
  const { major, minor, minorSin, minorCos, sinI, cosI, nearPhi, nearSigma, nearMeasure, samples, breaks, breakCount, longestPanel } = layout;
  module.define(
    ['i32', 'i32', 'i32', 'f64'],
    ['i32'],
    (w) => {
      const rays = w.variable('i32', w.parameter(0, 'i32'));
      const results = w.variable('i32', w.parameter(1, 'i32'));
      const [count, budget] = [w.parameter(2, 'i32'), w.parameter(3, 'f64')];
      const done = w.variable('i32');
      const spent = w.variable('f64');
      w.run(prepare);
      if (follower) w.run(follower.prepare);
      w.repeatWhile(() => int.and(int.less(done, count), f.less(spent, budget)), () => {
        major.set(w, f.load(rays));
        minor.set(w, f.load(rays, 8));
        minorSin.set(w, f.multiply(minor.get(), sinI.get()));
        minorCos.set(w, f.multiply(minor.get(), cosI.get()));
        for (const cell of [nearPhi, nearSigma, nearMeasure, samples]) cell.set(w, f.constant(0));
        w.run(sums.clear);
        if (follower) w.run(follower.begin);
        w.run(findBreaks);
        const k = w.variable('i32', int.subtract(breakCount.get(), int.constant(1)));
        w.repeatWhile(() => int.greaterThan(k, zero), () => {
          const address: Int = int.shiftLeft(k, int.constant(3));
          const [from, to] = [w.let(f.load(int.subtract(address, int.constant(8)), breaks)), w.let(f.load(address, breaks))];
          const length = w.let(f.subtract(to, from));
          const pieces = w.let(f.max(f.constant(1), f.ceil(f.divide(length, longestPanel.get()))));
          const piece = w.variable('f64', pieces);
          const near = w.variable('f64', to);
          w.repeatWhile(() => f.greaterThan(piece, f.constant(0)), () => {
            piece.set(f.subtract(piece, f.constant(1)));
            const far = w.let(f.add(from, f.divide(f.multiply(length, piece), pieces)));
            w.run(interval, far, near);
            near.set(far);
          });
          k.set(int.subtract(k, int.constant(1)));
        });
        w.run(sums.write, results);
        if (follower) w.run(follower.finish, int.add(results, int.constant(8 * ownLength)));
        const end = 8 * (ownLength - 3);
        w.store(results, end, nearPhi.get());
        w.store(results, end + 8, samples.get());
        w.store(results, end + 16, nearMeasure.get());
        rays.set(int.add(rays, int.constant(16)));
        results.set(int.add(results, int.constant(8 * resultLength)));
        done.set(int.add(done, int.constant(1)));
        spent.set(f.add(spent, samples.get()));
      });
      w.leave(done);
    },
    'follow',
  );
}

