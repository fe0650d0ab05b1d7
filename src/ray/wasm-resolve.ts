import { float as f, int, vector as v, type Float } from '../formula/wasm/code.ts';
import { exp } from '../formula/wasm/exponential.ts';
import type { FunctionWriter } from '../formula/wasm/function.ts';
import type { Callee } from '../formula/wasm/module.ts';
import { writeRotate } from './wasm-rotate.ts';
import { mostBehind, mostPerPanel } from './transfer.ts';
import { emissionBytes, spectrumRecord, type TransferContext, type TransferLayout } from './wasm-layout.ts';
import { hasValley, largest, loadNodes, measureTail, meanError, nodeBytes, zero } from './wasm-nodes.ts';

/** The test of a panel, and what it leaves behind for those that it accepts. */
export interface Resolve {
  /** (half): whether estimated errors are within the share of the tolerance that a panel may use. */
  readonly isResolved: Callee;
  /** (2λ², -2λ⁴, emission, into): rotated, damped polarized emission at the nodes, real then imaginary. */
  readonly rotate: Callee;
  /** Per tested frequency: address of its rotated emission, real then imaginary, at the nodes. */
  readonly rotated: readonly number[];
  /** Per tested frequency: address of the sum of squared errors. */
  readonly squaredErrors: readonly number[];
}

/** Writes `isResolved` of RayTracer. */
export function writeIsResolved(context: TransferContext): Resolve {
  const { module, layout, spectrum, structure } = context;
  const rotate = writeRotate(context);
  const rotated = structure.tested.map(() => module.reserve(2 * nodeBytes));
  const squaredErrors = structure.tested.map(() => module.reserve(8));
  const [no, yes] = [int.constant(0), int.constant(1)];
  const isResolved = module.define(['f64'], ['i32'], (w) => {
    const half = w.parameter(0, 'f64');
    const depth = measureTail(w, layout, int.constant(layout.faraday));
    const largestPhi = largest(w, loadNodes(w, layout.faraday));
    const path = w.let(f.multiply(f.constant(2), half));
    const errorPhi = w.let(f.multiply(path, meanError(w, depth)));
    const largestDispersion = structure.hasDispersion ? largest(w, loadNodes(w, layout.dispersion)) : f.constant(0);
    const limit = layout.limit.get();
    const groups = new Map<number, { readonly size: Float; readonly least: Float; readonly error: Float }>();
    const pending = structure.tested.map((k, slot) => {
      const record = (offset: number): Float => f.load(zero, spectrum + spectrumRecord.bytes * k + offset);
      const emission = layout.emission + emissionBytes * structure.groupOf[k];
      let group = groups.get(structure.groupOf[k]);
      if (!group) {
        const values = loadNodes(w, emission);
        const least = w.variable('f64', f.constant(0));
        w.when(hasValley(w, values), () => least.set(layout.valleyShare.get()));
        const error = w.let(f.multiply(path, meanError(w, measureTail(w, layout, int.constant(emission)), least)));
        group = { size: largest(w, values), least, error };
        groups.set(structure.groupOf[k], group);
      }
      const [turn, damping] = [w.let(record(spectrumRecord.turn)), w.let(record(spectrumRecord.damping))];
      const [scaleI, scaleP] = [w.let(record(spectrumRecord.scaleI)), w.let(record(spectrumRecord.scaleP))];
      refuseHidden(w, layout, { path, turn, damping, largestPhi, largestDispersion, emission: group.size, limit: f.multiply(layout.hidden.get(), scaleP), hasDispersion: structure.hasDispersion });
      const errorI = w.let(f.divide(group.error, scaleI));
      w.when(f.greaterThan(errorI, limit), () => w.leave(no));
      w.run(rotate, turn, damping, int.constant(emission), int.constant(rotated[slot]));
      const polarized = measureTail(w, layout, int.constant(rotated[slot]), int.constant(rotated[slot] + nodeBytes));
      const coupled = f.multiply(f.multiply(f.multiply(f.multiply(polarized.tail, turn), half), depth.tail), f.constant(0.1));
      const behind = f.multiply(f.multiply(turn, errorPhi), f.min(scaleI, f.multiply(f.constant(mostBehind), scaleP)));
      const errorP = w.let(f.divide(f.add(f.multiply(path, f.add(meanError(w, polarized, group.least), coupled)), behind), scaleP));
      w.when(f.greaterThan(errorP, limit), () => w.leave(no));
      return w.let(f.max(errorI, errorP));
    });
    pending.forEach((error, slot) => {
      w.store(zero, squaredErrors[slot], f.add(f.load(zero, squaredErrors[slot]), f.multiply(error, error)));
    });
    w.leave(yes);
  });
  return { isResolved, rotate, rotated, squaredErrors };
}

interface HiddenTest {
  readonly path: Float;
  readonly turn: Float;
  readonly damping: Float;
  readonly largestPhi: Float;
  readonly largestDispersion: Float;
  readonly emission: Float;
  readonly limit: Float;
  readonly hasDispersion: boolean;
}

/** Leaves with "not resolved" where emission between the nodes could go unnoticed: `mayHide` of RayTracer. */
function refuseHidden(w: FunctionWriter, layout: TransferLayout, { path, turn, damping, largestPhi, largestDispersion, emission, limit, hasDispersion }: HiddenTest): void {
  const turned = f.multiply(f.multiply(turn, path), largestPhi);
  const damped = f.multiply(f.multiply(f.negate(damping), path), largestDispersion);
  const exponent = hasDispersion ? f.add(turned, damped) : turned;
  w.when(int.not(f.less(exponent, f.constant(mostPerPanel))), () => {
    const reaching = hasDispersion ? v.lane(exp(w, w.let(v.splat(f.multiply(damping, layout.nearSigma.get())))), 0) : f.constant(1);
    w.when(f.greaterThan(f.multiply(f.multiply(path, emission), reaching), limit), () => w.leave(int.constant(0)));
  });
}
