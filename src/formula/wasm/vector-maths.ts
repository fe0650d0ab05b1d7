import type { BinaryName, UnaryName } from '../functions.ts';
import { vector as v, type Vector } from './code.ts';
import { decay, exp, expm1, holdExponent, hyperbolic, reduce, sech, tanh, type Decay, type Reduction } from './exponential.ts';
import type { FunctionWriter } from './function.ts';
import { log, pow } from './logarithm.ts';
import { erf, incompleteGamma2 } from './special.ts';
import { atan2, sineCosine } from './trigonometry.ts';

/** Writes functions of two numbers at a time, sharing what several functions of one argument have in common. */
export class VectorMaths {
  private readonly decays = new Map<number, Decay>();
  private readonly reductions = new Map<number, Reduction>();
  private readonly turns = new Map<number, readonly [Vector, Vector]>();

  constructor(private readonly w: FunctionWriter) {}

  /** A function of `x`; equal keys stand for equal arguments. */
  unary(name: UnaryName, x: Vector, key: number): Vector {
    const { w } = this;
    switch (name) {
      case 'abs':
        return v.abs(x);
      case 'sign':
        return v.select(v.greaterThan(v.abs(x), w.constant(0)), v.or(v.and(x, w.constant(-0)), w.constant(1)), x);
      case 'exp':
        return exp(w, x, this.reduction(x, key));
      case 'expm1':
        return expm1(w, x, this.reduction(x, key));
      case 'log':
        return log(this.w, x);
      case 'sin':
        return this.turn(x, key)[0];
      case 'cos':
        return this.turn(x, key)[1];
      case 'tan': {
        const [sine, cosine] = this.turn(x, key);
        return v.divide(sine, cosine);
      }
      case 'asin':
        return this.angle(x, this.complement(x));
      case 'acos':
        return this.angle(this.complement(x), x);
      case 'atan':
        return this.angle(x, w.constant(1));
      case 'tanh':
        return tanh(w, this.decay(x, key));
      case 'sech':
        return sech(w, this.decay(x, key));
      case 'sinh':
      case 'cosh':
        return this.call(name, (inner, u) => hyperbolic(inner, name, u), x);
      case 'erf':
        return this.call('erf', erf, x);
      case 'incompleteGamma2':
        return incompleteGamma2(w, x);
    }
  }

  /** A function of two arguments that gives a number; comparisons are masks and stand apart. */
  binary(name: Exclude<BinaryName, Comparison>, a: Vector, b: Vector): Vector {
    switch (name) {
      case 'min':
        return v.min(a, b);
      case 'max':
        return v.max(a, b);
      case 'atan2':
        return this.angle(a, b);
      case 'pow':
        return pow(this.w, a, b);
    }
  }

  private reduction(x: Vector, key: number): Reduction {
    const known = this.reductions.get(key) ?? reduce(this.w, holdExponent(this.w, x));
    this.reductions.set(key, known);
    return known;
  }

  private decay(x: Vector, key: number): Decay {
    const known = this.decays.get(key) ?? decay(this.w, x);
    this.decays.set(key, known);
    return known;
  }

  private turn(x: Vector, key: number): readonly [Vector, Vector] {
    const known = this.turns.get(key) ?? sineCosine(this.w, x);
    this.turns.set(key, known);
    return known;
  }

  private angle(y: Vector, x: Vector): Vector {
    const callee = this.w.module.once('atan2', ['v128', 'v128'], ['v128'], (inner) => inner.leave(atan2(inner, inner.parameter(0, 'v128'), inner.parameter(1, 'v128'))));
    return this.w.call(callee, 'v128', y, x);
  }

  /** √(1 - x²) by factors, exact also near 1. */
  private complement(x: Vector): Vector {
    const one = this.w.constant(1);
    return this.w.let(v.sqrt(v.multiply(v.subtract(one, x), v.add(one, x))));
  }

  private call(name: string, write: (w: FunctionWriter, x: Vector) => Vector, x: Vector): Vector {
    const callee = this.w.module.once(name, ['v128'], ['v128'], (inner) => inner.leave(write(inner, inner.parameter(0, 'v128'))));
    return this.w.call(callee, 'v128', x);
  }
}

/** Functions that answer yes or no. */
export type Comparison = 'less' | 'lessOrEqual' | 'equal';

/** All ones where the comparison holds, else all zeros. */
export function comparisonMask(name: Comparison, a: Vector, b: Vector): Vector {
  return { less: v.less, lessOrEqual: v.lessOrEqual, equal: v.equal }[name](a, b);
}
