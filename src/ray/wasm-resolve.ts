import { float as f, int, vector as v, type Float } from '../formula/wasm/code.ts';
import { exp } from '../formula/wasm/exponential.ts';
import type { FunctionWriter } from '../formula/wasm/function.ts';
import type { Callee } from '../formula/wasm/module.ts';
import { writeRotate } from './wasm-rotate.ts';
import { beating, mostBehind, mostDimmed, mostPerPanel } from './accuracy.ts';
import { emissionBytes, rotatedBytes, spectrumRecord, type TransferContext, type TransferLayout } from './wasm-layout.ts';
import { hasValley, largest, loadNodes, measureTail, meanError, nodeBytes, zero } from './wasm-nodes.ts';

/** The test of a panel, and what it leaves behind for those that it accepts. */
export interface Resolve {
  /** (half): whether estimated errors are within the share of the tolerance that a panel may use. */
  readonly isResolved: Callee;
  /** (2λ², -2λ⁴, -τ per emission measure, emission, into): see `writeRotate`. */
  readonly rotate: Callee;
  /** Per tested frequency: address of what `rotate` gives. */
  readonly rotated: readonly number[];
  /** Per tested frequency: address of the sum of squared errors. */
  readonly squaredErrors: readonly number[];
}

/** Writes `isResolved` of RayTracer. */
export function writeIsResolved(context: TransferContext): Resolve {
  const { module, layout, spectrum, structure } = context;
  const rotate = writeRotate(context);
  const rotated = structure.tested.map(() => module.reserve(rotatedBytes(structure)));
  const squaredErrors = structure.tested.map(() => module.reserve(8));
  const [no, yes] = [int.constant(0), int.constant(1)];
  const isResolved = module.define(['f64'], ['i32'], (w) => {
    const half = w.parameter(0, 'f64');
    const depth = measureTail(w, layout, int.constant(layout.faraday));
    const largestPhi = largest(w, loadNodes(w, layout.faraday));
    const path = w.let(f.multiply(f.constant(2), half));
    const errorPhi = w.let(f.multiply(path, meanError(w, depth)));
    const gas = structure.hasAbsorption ? measureGas(w, layout, path) : undefined;
    const largestDispersion = structure.hasDispersion ? largest(w, loadNodes(w, layout.dispersion)) : undefined;
    const limit = layout.limit.get();
    const groups = new Map<number, Light>();
    const sizes = new Map<number, Float>();
    const lightAt = (address: number): Light => {
      const values = loadNodes(w, address);
      const least = w.variable('f64', f.constant(0));
      w.when(hasValley(w, values), () => least.set(layout.valleyShare.get()));
      const tail = measureTail(w, layout, int.constant(address));
      return { least, tail: tail.tail, error: meanError(w, tail, least) };
    };
    const pending = structure.tested.map((k, slot) => {
      const record = (offset: number): Float => f.load(zero, spectrum + spectrumRecord.bytes * k + offset);
      const emission = layout.emission + emissionBytes * structure.groupOf[k];
      const [turn, damping] = [w.let(record(spectrumRecord.turn)), w.let(record(spectrumRecord.damping))];
      const [scaleI, scaleP] = [w.let(record(spectrumRecord.scaleI)), w.let(record(spectrumRecord.scaleP))];
      const opacity = w.let(record(spectrumRecord.opacity));
      const dimming = gas && gasAt(w, layout, gas, { half, opacity, source: record(spectrumRecord.source) });
      const made = sizes.get(emission) ?? largest(w, loadNodes(w, emission));
      sizes.set(emission, made);
      refuseHidden(w, layout, { path, turn, damping, largestPhi, largestDispersion, made, scaleI, scaleP, dimming });
      if (dimming) w.run(rotate, turn, damping, opacity, int.constant(emission), int.constant(rotated[slot]));
      const known = dimming ? undefined : groups.get(structure.groupOf[k]);
      const light = known ?? lightAt(dimming ? rotated[slot] + 2 * nodeBytes : emission);
      groups.set(structure.groupOf[k], light);
      const beaten = dimming ? f.add(light.error, f.multiply(light.tail, dimming.beaten)) : light.error;
      const integrated = f.multiply(path, beaten);
      const errorI = w.let(f.divide(dimming ? f.add(integrated, f.multiply(dimming.dimmed, f.add(f.multiply(dimming.arriving, scaleI), dimming.thermal))) : integrated, scaleI));
      w.when(f.greaterThan(errorI, limit), () => w.leave(no));
      if (!dimming) w.run(rotate, turn, damping, opacity, int.constant(emission), int.constant(rotated[slot]));
      const polarized = measureTail(w, layout, int.constant(rotated[slot]), int.constant(rotated[slot] + nodeBytes));
      const turned = f.multiply(f.multiply(f.multiply(turn, half), depth.tail), f.constant(beating));
      const coupled = f.multiply(polarized.tail, dimming ? f.add(turned, dimming.beaten) : turned);
      const blurred = f.multiply(turn, errorPhi);
      const behind = f.multiply(dimming ? f.add(blurred, f.multiply(dimming.dimmed, dimming.arriving)) : blurred, f.min(scaleI, f.multiply(f.constant(mostBehind), scaleP)));
      const errorP = w.let(f.divide(f.add(f.multiply(path, f.add(meanError(w, polarized, light.least), coupled)), behind), scaleP));
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

/** Unpolarized emission at the nodes: the least share of its tail that is believed, its tail, the error of its mean. */
interface Light {
  readonly least: Float;
  readonly tail: Float;
  readonly error: Float;
}

/** Thermal gas in a panel: its last coefficients, its largest value, the error of its column. */
interface Gas {
  readonly tail: Float;
  readonly largest: Float;
  readonly error: Float;
}

function measureGas(w: FunctionWriter, layout: TransferLayout, path: Float): Gas {
  const tail = measureTail(w, layout, int.constant(layout.gas));
  return { tail: tail.tail, largest: largest(w, loadNodes(w, layout.gas)), error: w.let(f.multiply(path, meanError(w, tail))) };
}

/** What the gas of a panel does to one frequency: the terms of `isResolved` of RayTracer. */
interface Dimming {
  /** Optical depth of a path of the gas's largest value through the panel. */
  readonly absorption: Float;
  /** Share of light that comes through to the panel's near end. */
  readonly through: Float;
  readonly beaten: Float;
  readonly dimmed: Float;
  readonly arriving: Float;
  readonly thermal: Float;
}

function gasAt(w: FunctionWriter, layout: TransferLayout, gas: Gas, { half, opacity, source }: { readonly half: Float; readonly opacity: Float; readonly source: Float }): Dimming {
  const depth = w.let(f.negate(opacity));
  const through = w.let(v.lane(exp(w, w.let(v.splat(f.multiply(opacity, layout.nearMeasure.get())))), 0));
  return {
    absorption: w.let(f.multiply(f.multiply(f.multiply(f.constant(2), half), depth), gas.largest)),
    through,
    beaten: w.let(f.multiply(f.multiply(f.multiply(depth, half), gas.tail), f.constant(beating))),
    dimmed: w.let(f.multiply(depth, gas.error)),
    arriving: w.let(f.min(f.constant(1), f.multiply(f.constant(mostDimmed), through))),
    thermal: w.let(f.multiply(through, source)),
  };
}

interface HiddenTest {
  readonly path: Float;
  readonly turn: Float;
  readonly damping: Float;
  readonly largestPhi: Float;
  readonly largestDispersion: Float | undefined;
  readonly made: Float;
  readonly scaleI: Float;
  readonly scaleP: Float;
  readonly dimming: Dimming | undefined;
}

/** Leaves with "not resolved" where emission between the nodes could go unnoticed: `mayHide` of RayTracer. */
function refuseHidden(w: FunctionWriter, layout: TransferLayout, { path, turn, damping, largestPhi, largestDispersion, made, scaleI, scaleP, dimming }: HiddenTest): void {
  const turned = f.multiply(f.multiply(turn, path), largestPhi);
  const damped = largestDispersion ? f.add(turned, f.multiply(f.multiply(f.negate(damping), path), largestDispersion)) : turned;
  const exponent = dimming ? f.add(damped, dimming.absorption) : damped;
  w.when(int.not(f.less(exponent, f.constant(mostPerPanel))), () => {
    const emitted = f.multiply(path, made);
    const reaching = w.let(dimming ? f.multiply(emitted, dimming.through) : emitted);
    const refuse = (light: Float, scale: Float): void => {
      w.when(f.greaterThan(light, f.multiply(layout.hidden.get(), scale)), () => w.leave(int.constant(0)));
    };
    if (dimming) w.when(int.not(f.less(dimming.absorption, f.constant(mostPerPanel))), () => refuse(reaching, scaleI));
    const polarized = largestDispersion ? f.multiply(reaching, v.lane(exp(w, w.let(v.splat(f.multiply(damping, layout.nearSigma.get())))), 0)) : reaching;
    refuse(polarized, scaleP);
  });
}
