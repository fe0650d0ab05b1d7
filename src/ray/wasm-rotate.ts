import { int, vector as v, type Int, type Vector } from '../formula/wasm/code.ts';
import { exp } from '../formula/wasm/exponential.ts';
import type { FunctionWriter } from '../formula/wasm/function.ts';
import type { Callee } from '../formula/wasm/module.ts';
import { largestPlainAngle, sineCosine, sineCosinePlain } from '../formula/wasm/trigonometry.ts';
import type { TransferContext } from './wasm-layout.ts';
import { nodeBytes, pairOffsets, zero } from './wasm-nodes.ts';

type SineCosine = (w: FunctionWriter, x: Vector) => readonly [Vector, Vector];

/**
 * Writes `rotate` of RayTracer as a function of (2λ², -2λ⁴, -τ per emission measure, emission, into):
 * the polarized emission of a group at the nodes, rotated, damped and absorbed, real parts then
 * imaginary ones; where there is gas, behind them the unpolarized emission that comes through it.
 */
export function writeRotate({ module, layout, structure }: TransferContext): Callee {
  return module.define(['f64', 'f64', 'f64', 'i32', 'i32'], [], (w) => {
    const [turn, damping, opacity] = [0, 1, 2].map((k) => w.let(v.splat(w.parameter(k, 'f64'))));
    const [emission, into] = [w.parameter(3, 'i32'), w.parameter(4, 'i32')];
    const rotateWith = (sineCosineOf: SineCosine): void => {
      w.count(zero, int.constant(nodeBytes), 16, (offset) => {
        const angle = w.let(v.multiply(turn, v.load(offset, layout.phi)));
        const [sine, cosine] = sineCosineOf(w, angle);
        const absorbed = structure.hasAbsorption ? w.let(v.multiply(opacity, v.load(offset, layout.measure))) : undefined;
        const damped = structure.hasDispersion ? w.let(v.multiply(damping, v.load(offset, layout.sigma))) : undefined;
        const exponent = absorbed && damped ? w.let(v.add(absorbed, damped)) : (absorbed ?? damped);
        const size = exponent && w.let(exp(w, exponent));
        const part = (k: number): Vector => {
          const value = v.load(int.add(emission, offset), nodeBytes * k);
          return w.let(size ? v.multiply(value, size) : value);
        };
        const [major, minor] = [part(1), part(2)];
        const place: Int = w.let(int.add(into, offset));
        w.store(place, 0, v.subtract(v.multiply(cosine, major), v.multiply(sine, minor)));
        w.store(place, nodeBytes, v.add(v.multiply(sine, major), v.multiply(cosine, minor)));
        if (absorbed) w.store(place, 2 * nodeBytes, v.multiply(v.load(int.add(emission, offset), 0), damped ? exp(w, absorbed) : (size ?? absorbed)));
      });
    };
    const depths = pairOffsets.map((pair) => v.abs(v.load(zero, layout.phi + pair))).reduce((largest, depth) => v.greater(largest, depth));
    w.when(
      v.anyTrue(v.greaterThan(v.multiply(turn, depths), w.constant(largestPlainAngle))),
      () => rotateWith(sineCosine),
      () => rotateWith(sineCosinePlain),
    );
  });
}
