import type { RandomStream } from '../math/random.ts';

/** Where a walker may go next. */
export interface Proposal {
  readonly point: Float64Array;
  /** ln of the factor beside the ratio of densities in the chance of acceptance. */
  readonly logFactor: number;
}

/** Proposes a point for one walker from the positions of others, which do not move meanwhile. */
export type WalkerMove = (random: RandomStream, walker: ArrayLike<number>, others: readonly ArrayLike<number>[]) => Proposal;

/** Largest stretch (Goodman & Weare 2010, section 2). */
const stretch = 2;

/** The stretch move (Goodman & Weare 2010, eq. 7 and 9): along the line through another walker. */
export const stretchMove: WalkerMove = (random, walker, others) => {
  const anchor = pick(random, others);
  const z = ((stretch - 1) * random.uniform() + 1) ** 2 / stretch;
  const point = Float64Array.from({ length: walker.length }, (_, j) => anchor[j] + z * (walker[j] - anchor[j]));
  return { point, logFactor: (walker.length - 1) * Math.log(z) };
};

/** Every tenth jump is the whole difference, which leads from peak to peak (ter Braak 2006, section 2). */
const wholeJumpShare = 0.1;

/**
 * Differential evolution (ter Braak 2006, eq. 2): by the difference of two other walkers, scaled by
 * 2.38/sqrt(2n); a small Gaussian share (Nelson et al. 2014) keeps it from running in a lattice.
 */
export const differenceMove: WalkerMove = (random, walker, others) => {
  const first = pick(random, others);
  let second = pick(random, others);
  while (second === first) second = pick(random, others);
  const scale = random.uniform() < wholeJumpShare ? 1 : 2.38 / Math.sqrt(2 * walker.length);
  const gamma = scale * (1 + 1e-4 * random.gaussian());
  return { point: Float64Array.from({ length: walker.length }, (_, j) => walker[j] + gamma * (first[j] - second[j])), logFactor: 0 };
};

function pick<T>(random: RandomStream, list: readonly T[]): T {
  return list[Math.floor(random.uniform() * list.length)];
}
