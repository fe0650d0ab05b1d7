import { arnoldi, type RitzPair } from '../../math/arnoldi.ts';
import { factorShifted, solveBandedLu } from '../../math/banded-lu.ts';
import { randomStream } from '../../math/random.ts';
import type { SparseMatrix } from '../../math/sparse.ts';

/** A mode exp((growthRate + i frequency) t) of a linear operator, rates per unit of its time. */
export interface Mode {
  readonly growthRate: number;
  /** 0 where the mode does not oscillate. */
  readonly frequency: number;
  /** Real and imaginary part of the shape, together of unit length. */
  readonly shape: readonly [Float64Array, Float64Array];
}

/** The eigenvalue iteration did not settle: nothing it found is to be believed. */
export class ModesNotFound extends Error {}

/** Relative to the distance of an eigenvalue from the shift: below rounding's effect on any rate shown. */
const residualWanted = 1e-8;
const mostRestarts = 8;
/** Times that the search's steps are quartered. */
const mostShorter = 6;
/** Vectors of a Krylov space, in the search and in the refinement. */
const searchVectors = 32;
const refineVectors = 24;
/** Time steps of one application of the evolution. */
const searchSteps = 4;

/**
 * The `count` modes of largest growth rate, whatever their frequency. They are searched with the
 * operator's own evolution, which ranks by growth: several time steps of an implicit scheme of second
 * order make the map whose largest eigenvalues Arnoldi's method finds. `rate` bounds the growth rates and
 * frequencies that matter. Throws ModesNotFound.
 */
export function searchModes(matrix: SparseMatrix, count: number, rate: number): readonly Mode[] {
  const random = randomStream(1, 'dynamo modes');
  const start = Float64Array.from({ length: matrix.size }, () => random.gaussian());
  return refineModes(matrix, searchShapes(matrix, start, count, rate), count, rate);
}

/** Modes near known ones, such as those of a coarser grid brought to this one. Throws ModesNotFound. */
export function refineModes(matrix: SparseMatrix, known: readonly Mode[], count: number, rate: number): readonly Mode[] {
  // A real shift just beyond the fastest mode: the nearest eigenvalues are then the wanted ones.
  const wanted = Math.min(count, matrix.size);
  const slowest = known[Math.min(known.length, wanted) - 1].growthRate;
  const shift = known[0].growthRate + Math.max(0.3 * (known[0].growthRate - slowest), 0.02 * rate);
  const factors = factorShifted(matrix, -shift, 1);
  let start = sumOfShapes(known.slice(0, wanted));
  for (let restart = 0; restart < mostRestarts; restart++) {
    const pairs = arnoldi((x) => solveBandedLu(factors, x), start, Math.min(refineVectors, matrix.size));
    const modes = pairs.map((pair) => ({ mode: modeOfInverse(pair, shift), residual: pair.residual / Math.hypot(pair.real, pair.imaginary) }));
    // Only what has settled well enough to be ranked is; the least settled would be noise.
    const settled = modes.filter(({ residual }) => residual < 1e-2).sort((a, b) => b.mode.growthRate - a.mode.growthRate).slice(0, wanted);
    if (settled.length === 0) {
      start = sumOfShapes(modes.slice(0, wanted).map(({ mode }) => mode));
      continue;
    }
    const isEnough = settled.length === wanted || pairs.length < refineVectors / 2;
    if (isEnough && settled.every(({ residual }) => residual < residualWanted)) return settled.map(({ mode }) => mode);
    start = sumOfShapes(settled.map(({ mode }) => mode));
  }
  throw new ModesNotFound(`the ${wanted} leading modes did not settle within ${mostRestarts} restarts`);
}

/**
 * Beyond z = -1.5 the scheme below ranks wrongly, with |R| up to 0.21: shorter steps are wanted where a
 * mode is damped that much within a step.
 */
const leastPerStep = 0.3;

/** Rough leading modes, by growth rate. */
function searchShapes(matrix: SparseMatrix, start: Float64Array, count: number, rate: number, shorter = 0): readonly Mode[] {
  // The L-stable scheme of two equal stages: R(z) = (1 + (1 - 2g)z)/(1 - gz)^2 with g = 1 - 1/sqrt 2
  // (Alexander 1977), written as -sqrt 2/(1 - gz) + (1 + sqrt 2)/(1 - gz)^2.
  const gamma = 1 - Math.SQRT1_2;
  const step = 1 / rate;
  const factors = factorShifted(matrix, 1, -gamma * step);
  const evolve = (x: Float64Array): Float64Array => {
    let state = x;
    for (let k = 0; k < searchSteps; k++) {
      const once = solveBandedLu(factors, state);
      const twice = solveBandedLu(factors, once);
      state = twice.map((value, i) => (1 + Math.SQRT2) * value - Math.SQRT2 * once[i]);
    }
    return state;
  };
  let from = start;
  for (let restart = 0; ; restart++) {
    const pairs = arnoldi(evolve, from, Math.min(searchVectors, matrix.size)).slice(0, count + 2);
    const modes = pairs.map((pair): Mode => ({ ...rateOfGrowth(pair, searchSteps * step), shape: pair.vector }));
    const perStep = Math.min(...pairs.slice(0, count).map(({ real, imaginary }) => Math.hypot(real, imaginary) ** (1 / searchSteps)));
    if (perStep < leastPerStep && shorter < mostShorter) return searchShapes(matrix, start, count, 4 * rate, shorter + 1);
    const isRough = pairs.slice(0, count).every(({ residual, real, imaginary }) => residual < 0.03 * Math.hypot(real, imaginary));
    if (isRough || restart === 3) return modes;
    from = sumOfShapes(modes);
  }
}

/** ln of an eigenvalue of the evolution over a time; the frequency is rough, beyond half a turn wrong. */
function rateOfGrowth({ real, imaginary }: RitzPair, time: number): { growthRate: number; frequency: number } {
  return { growthRate: Math.log(Math.hypot(real, imaginary)) / time, frequency: Math.atan2(imaginary, real) / time };
}

/** The mode of an eigenvalue 1/(rate - shift) of the inverse. */
function modeOfInverse({ real, imaginary, vector: [re, im] }: RitzPair, shift: number): Mode {
  const size = real * real + imaginary * imaginary;
  // 1/mu has the opposite sign of frequency: the conjugate is meant.
  return { growthRate: shift + real / size, frequency: imaginary / size, shape: [re, im.map((value) => -value)] };
}

function sumOfShapes(modes: readonly Mode[]): Float64Array {
  const sum = new Float64Array(modes[0].shape[0].length);
  modes.forEach(({ shape: [re, im], frequency }, k) => {
    for (let i = 0; i < sum.length; i++) sum[i] += (re[i] + (frequency === 0 ? 0 : im[i])) / (1 + 0.3 * k);
  });
  return sum;
}
