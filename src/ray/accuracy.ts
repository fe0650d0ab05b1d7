/** How exact a ray must be: absolute limits per frequency, in units of ∫ C ⟨B^q⟩ ds. */
export interface Accuracy {
  readonly tolerance: number;
  /** Scale of I: the largest of the map, per frequency. */
  readonly scaleI: Float64Array;
  /** Scale of Q and U: the larger of the largest |P| and 1e-3 of the largest I, per frequency. */
  readonly scaleP: Float64Array;
}

/** Bisections of one interval. */
export const deepestSplit = 48;
/** Samples that one ray may take, ten thousand times what galaxies need: what wants more has no end worth waiting for. */
export const mostSamples = 1_000_000;
/**
 * Largest error that one panel may be estimated to have, over the tolerance. Panels' errors rarely
 * add up and the estimates are far too large where coefficients fall ever faster, as they do in
 * wide panels; at small tolerances, where they fall evenly, less of that is left.
 */
function looseness(tolerance: number): number {
  return Math.max(0.013, Math.min(1, tolerance / 1e-4));
}

/** Largest error that one panel may be estimated to have. */
export function panelLimit(tolerance: number): number {
  return tolerance * looseness(tolerance);
}

/**
 * Share of the tail that a panel with a valley is estimated to be wrong by at least. Where the
 * field across the line of sight vanishes, B^q has a kink: coefficients stop falling, and the true
 * error is up to a tenth of the tail; this keeps it below a third of the tolerance.
 */
export function valleyShare(tolerance: number): number {
  return looseness(tolerance) / 3;
}

/** Emission between the nodes of a panel that falls below this share of that on either side is a valley. */
export const valleyDepth = 0.8;

/**
 * The error to be stated for a ray whose panels' estimates add up to `estimate`: a bound, not a
 * guess. Over 250 random scenes of 24 rays each, errors beside runs at 1e-8 were at most 0.85 of
 * what this states, 0.1 in one scene of ten, and a hundredth and less in most: estimates by the
 * tail of the coefficients must hold for valleys too, which few panels have.
 */
export function statedError(tolerance: number, estimate: number): number {
  return (estimate * tolerance) / panelLimit(tolerance) / 6;
}

/** Polarization from behind a panel, net of its own rotation, over the scale of P: a bound. */
export const mostBehind = 10;
/**
 * Coefficients are never trusted to fall faster in two degrees: beneath a large smooth part a small
 * one that falls more slowly may hide.
 */
export const fastestDecay = 0.03;
/** Share of the errors of a depth at the nodes that beats with the last coefficients of the emission. */
export const beating = 0.1;
/** Keeps ratios of coefficients finite. */
export const tiniest = 1e-300;
/** Emission that a panel may hide between its nodes, over the tolerance. */
export const mostHidden = 0.1;
/** Light from behind thermal gas, as it would be without the gas, over the scale of I: a bound. */
export const mostDimmed = 1e6;
/** Largest turn, damping or absorption exponent across a panel that its nodes are trusted to notice. */
export const mostPerPanel = 12;

/** Where the far side is damped or absorbed, tested frequencies lie at most this factor apart in λ², if there are any between. */
const testedRatio = 2;

/**
 * Frequencies whose integrands decide on bisection: the longest and the shortest wavelength; where
 * unresolved turbulence or thermal gas may hide from the longest what shorter ones see, some between them too.
 */
export function testedFrequencies(wavelengthM2: Float64Array, hidesFar: boolean): readonly number[] {
  const order = Array.from(wavelengthM2.keys()).sort((a, b) => wavelengthM2[b] - wavelengthM2[a]);
  const tested = [order[0]];
  for (const k of hidesFar ? order : []) {
    if (wavelengthM2[tested[tested.length - 1]] >= testedRatio * wavelengthM2[k]) tested.push(k);
  }
  const shortest = order[order.length - 1];
  return tested.includes(shortest) ? tested : [...tested, shortest];
}
