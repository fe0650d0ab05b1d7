/** Coefficients of one ray's polarization and intensity over its band, [term], terms [degree * offsets + offset]. */
export interface RayCoefficients {
  readonly I: Float64Array;
  readonly Q: Float64Array;
  readonly U: Float64Array;
}

/** What the coefficients of a band are held against: largest values of the map, over the spectrum. */
export interface BandScale {
  readonly I: number;
  readonly P: number;
}

/** Share of the tolerance that may be lost between the nodes: the rays themselves need the rest. */
const lostShare = 0.2;
/** Coefficients are trusted to fall no faster than this in two degrees, and no more slowly. */
const [fastest, slowest] = [0.03, 0.9];
/** Fewer degrees do not tell how coefficients fall. */
export const leastDegrees = 5;

/** Sizes of the coefficients of degrees `degree` and `degree - 1`, all offsets together; complex ones where there are two parts. */
function pairSize(degree: number, offsets: number, real: Float64Array, imaginary: Float64Array | undefined): number {
  let size = 0;
  for (let term = (degree - 1) * offsets; term < (degree + 1) * offsets; term++) {
    size += imaginary ? Math.sqrt(real[term] * real[term] + imaginary[term] * imaginary[term]) : Math.abs(real[term]);
  }
  return size;
}

/**
 * Error of an interpolant of `degrees` coefficients, estimated from the last two pairs: beyond the
 * depths on a ray coefficients fall ever faster, as Bessel functions of fixed argument do, and what
 * is left out counts twice, by its absence and by its alias (Trefethen 2013, ch. 4 and 8).
 */
function tailError(degrees: number, offsets: number, real: Float64Array, imaginary?: Float64Array): number {
  const [last, before] = [degrees - 1, degrees - 3].map((degree) => pairSize(degree, offsets, real, imaginary));
  const fall = Math.min(slowest, Math.max(fastest, last / Math.max(before, Number.MIN_VALUE)));
  return (2 * last * fall) / (1 - fall);
}

/** Error of a ray's interpolant over the scale that `tolerance` bounds; `faintness` is the ray's own share of that scale. */
export function interpolationError(ray: RayCoefficients, degrees: number, offsets: number, scale: BandScale, faintness = 1): number {
  return Math.max(tailError(degrees, offsets, ray.I) / scale.I, tailError(degrees, offsets, ray.Q, ray.U) / scale.P) / faintness;
}

/** Whether such an error is small enough. */
export function isNegligible(error: number, tolerance: number): boolean {
  return error <= lostShare * tolerance;
}

/**
 * How few degrees would do for a ray whose coefficients up to `degrees` are known, themselves
 * negligible at the end: both by the estimate and by what would truly be left out.
 */
export function degreesNeeded(ray: RayCoefficients, degrees: number, offsets: number, scale: BandScale, tolerance: number): number {
  let [leftI, leftP] = [0, 0];
  for (let count = degrees; count > leastDegrees; count--) {
    const degree = count - 1;
    for (let term = degree * offsets; term < count * offsets; term++) {
      leftI += 2 * Math.abs(ray.I[term]);
      leftP += 2 * Math.hypot(ray.Q[term], ray.U[term]);
    }
    const left = Math.max(leftI / scale.I, leftP / scale.P);
    if (!isNegligible(Math.max(left, interpolationError(ray, count - 1, offsets, scale)), tolerance)) return count;
  }
  return leastDegrees;
}
