import { int, vector as v, type Int, type Vector } from '../formula/wasm/code.ts';
import { exp } from '../formula/wasm/exponential.ts';
import type { FunctionWriter } from '../formula/wasm/function.ts';
import type { Callee } from '../formula/wasm/module.ts';
import { largestPlainAngle, sineCosine, sineCosinePlain } from '../formula/wasm/trigonometry.ts';
import type { TransferContext } from './wasm-layout.ts';
import { nodeBytes, pairOffsets, zero } from './wasm-nodes.ts';

type SineCosine = (w: FunctionWriter, x: Vector) => readonly [Vector, Vector];

/**
 * Writes `rotate` of RayTracer as a function of (2λ², -2λ⁴, emission, into): the polarized
 * emission of a group at the nodes, rotated and damped, real parts then imaginary ones.
 */
export function writeRotate({ module, layout, structure }: TransferContext): Callee {
  return module.define(['f64', 'f64', 'i32', 'i32'], [], (w) => {
    const [turn, damping] = [0, 1].map((k) => w.let(v.splat(w.parameter(k, 'f64'))));
    const [emission, into] = [w.parameter(2, 'i32'), w.parameter(3, 'i32')];
    const rotateWith = (sineCosineOf: SineCosine): void => {
      w.count(zero, int.constant(nodeBytes), 16, (offset) => {
        const angle = w.let(v.multiply(turn, v.load(offset, layout.phi)));
        const [sine, cosine] = sineCosineOf(w, angle);
        const size = structure.hasDispersion ? exp(w, w.let(v.multiply(damping, v.load(offset, layout.sigma)))) : undefined;
        const part = (k: number): Vector => {
          const value = v.load(int.add(emission, offset), nodeBytes * k);
          return w.let(size ? v.multiply(value, size) : value);
        };
        const [major, minor] = [part(1), part(2)];
        const place: Int = w.let(int.add(into, offset));
        w.store(place, 0, v.subtract(v.multiply(cosine, major), v.multiply(sine, minor)));
        w.store(place, nodeBytes, v.add(v.multiply(sine, major), v.multiply(cosine, minor)));
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
