import { asymmetricSlab } from './asymmetric-slab.ts';
import { burnSlab } from './burn-slab.ts';
import { depthGradient } from './depth-gradient.ts';
import { exponentialDisc } from './exponential-disc.ts';
import { externalDispersion } from './external-dispersion.ts';
import { internalDispersion } from './internal-dispersion.ts';
import { partialCover } from './partial-cover.ts';
import { resolvedCover } from './resolved-cover.ts';
import { sumOfTwo } from './sum-of-two.ts';
import { thinScreen } from './thin-screen.ts';
import { tribbleScreen } from './tribble-screen.ts';
import { twistedSlab } from './twisted-slab.ts';
import { twoSlabs } from './two-slabs.ts';
import type { Law } from './types.ts';

/** The laws of P(lambda^2), simplest first; one file each. */
export const laws: readonly Law[] = [
  thinScreen,
  burnSlab,
  externalDispersion,
  internalDispersion,
  asymmetricSlab,
  twistedSlab,
  exponentialDisc,
  depthGradient,
  partialCover,
  resolvedCover,
  tribbleScreen,
  twoSlabs,
];

/** Sums of two, for sectors and integrated light. */
export const sumsOfTwo: readonly Law[] = [
  sumOfTwo(thinScreen, thinScreen),
  sumOfTwo(thinScreen, externalDispersion),
  sumOfTwo(externalDispersion, externalDispersion),
  sumOfTwo(burnSlab, burnSlab),
];
