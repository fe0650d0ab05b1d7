/** All maps here are plain planes of equal length; NaN is blank and stays blank. */
type Plane = ArrayLike<number>;

function mapPlane(length: number, value: (k: number) => number): Float64Array {
  const plane = new Float64Array(length);
  for (let k = 0; k < length; k++) plane[k] = value(k);
  return plane;
}

/** Polarized intensity |Q + iU|. Its error is that of Q and U. */
export function polarizedIntensity(Q: Plane, U: Plane): Float64Array {
  return mapPlane(Q.length, (k) => Math.hypot(Q[k], U[k]));
}

/**
 * Polarized intensity without the bias of noise: sqrt(P^2 - sigma^2), 0 below, sigma the rms of Q
 * and of U. Source: Wardle & Kronberg 1974.
 */
export function debiasedIntensity(P: Plane, sigma: number): Float64Array {
  return mapPlane(P.length, (k) => Math.sqrt(Math.max(P[k] * P[k] - sigma * sigma, 0)));
}

/** Polarized fraction P/I; blank where I is not above `smallestI`. */
export function polarizedFraction(P: Plane, I: Plane, smallestI = 0): Float64Array {
  return mapPlane(P.length, (k) => (I[k] > smallestI ? P[k] / I[k] : NaN));
}

/** Error of P/I from the rms of P and of I, to first order; blank where I is not above `smallestI`. */
export function fractionError(P: Plane, I: Plane, sigmaP: number, sigmaI: number, smallestI = 0): Float64Array {
  return mapPlane(P.length, (k) =>
    I[k] > smallestI ? Math.hypot(sigmaP, (P[k] / I[k]) * sigmaI) / I[k] : NaN,
  );
}

/** Angle of the electric vector, 1/2 atan2(U, Q), north through east, rad, in (-pi/2, pi/2]; blank where P is 0. */
export function polarizationAngle(Q: Plane, U: Plane): Float64Array {
  return mapPlane(Q.length, (k) => (Q[k] === 0 && U[k] === 0 ? NaN : Math.atan2(U[k], Q[k]) / 2));
}

/** Error of the angle, rad: sigma/(2 P), but no more than pi/sqrt(12), where nothing is known of it. */
export function angleError(P: Plane, sigma: number): Float64Array {
  return mapPlane(P.length, (k) => Math.min(sigma === 0 ? 0 : sigma / (2 * P[k]), Math.PI / Math.sqrt(12)));
}

/**
 * Depolarization between two bands, DP = (P1/P2) (nu2/nu1)^-alpha, band 1 the longer wavelength,
 * alpha = (p - 1)/2: 1 where only the synchrotron spectrum changes P. Blank where P2 is not above
 * `smallestP2`.
 */
export function depolarization(
  P1: Plane,
  P2: Plane,
  frequency1Hz: number,
  frequency2Hz: number,
  alpha: number,
  smallestP2 = 0,
): Float64Array {
  const spectrum = (frequency2Hz / frequency1Hz) ** -alpha;
  return mapPlane(P1.length, (k) => (P2[k] > smallestP2 ? (P1[k] / P2[k]) * spectrum : NaN));
}

/** Degrees from radians, plane by plane. */
export function inDegrees(angles: Plane): Float64Array {
  return mapPlane(angles.length, (k) => (angles[k] * 180) / Math.PI);
}
