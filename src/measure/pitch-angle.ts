import { discCoordinates, pixelsPerBeam, type DiscOrientation, type MapFrame } from './disc.ts';

/** The pitch of an orientation in a region, rad, in (-pi/2, pi/2], with errors from noise and from the scatter of its pixels. */
export interface RegionPitch {
  readonly pitch: number;
  /** From the errors of the angles, and from the scatter over the independent beams. */
  readonly error: number;
  readonly scatterError: number;
  readonly pixels: number;
}

/**
 * Pitch angle of a map of field orientations (rad, north through east; Faraday-corrected, so that they
 * are those of B) for a field that lies in the disc: the orientation is deprojected, then turned into
 * B_r and B_phi, p = atan(B_r/B_phi), rad in (-pi/2, pi/2]; NaN where the orientation is. Trailing
 * spirals have p < 0. Vertical fields are taken as absent. Common practice.
 */
export function pitchAngles(fieldAngle: Float64Array, frame: MapFrame, orientation: DiscOrientation): Float64Array {
  const { azimuth } = discCoordinates(frame, orientation);
  const cos = Math.cos(orientation.inclination);
  return fieldAngle.map((angle, k) => {
    // Along the receding half of the major axis, and across it at position angle + 90 deg.
    const along = Math.cos(angle - orientation.positionAngle);
    const across = Math.sin(angle - orientation.positionAngle) / cos;
    const [c, s] = [Math.cos(azimuth[k]), Math.sin(azimuth[k])];
    const radial = along * c + across * s;
    const azimuthal = across * c - along * s;
    // An orientation has no sign: p is known up to 180 deg.
    return azimuthal < 0 ? Math.atan2(-radial, -azimuthal) : Math.atan2(radial, azimuthal);
  });
}

/**
 * Mean pitch of the pixels of each region, weighted by `weights` (such as P) where given: half the
 * angle of the summed e^{2ip}. `regionOf` holds 0 to count - 1, or -1. `angleErrors` are those of the
 * field angle; a deprojected angle errs by up to 1/cos i more, which is counted in full.
 */
export function regionPitches(
  pitches: Float64Array,
  angleErrors: Float64Array | undefined,
  regionOf: Int32Array,
  count: number,
  frame: MapFrame,
  orientation: DiscOrientation,
  weights?: Float64Array,
): RegionPitch[] {
  const sums = Array.from({ length: count }, () => ({ re: 0, im: 0, weight: 0, square: 0, errors: 0, pixels: 0 }));
  regionOf.forEach((region, k) => {
    const weight = weights ? weights[k] : 1;
    if (region < 0 || !Number.isFinite(pitches[k]) || !(weight > 0)) return;
    const sum = sums[region];
    sum.re += weight * Math.cos(2 * pitches[k]);
    sum.im += weight * Math.sin(2 * pitches[k]);
    sum.weight += weight;
    sum.square += weight * weight;
    sum.errors += (weight * (angleErrors?.[k] ?? 0)) ** 2;
    sum.pixels++;
  });
  const perBeam = pixelsPerBeam(frame);
  const stretch = 1 / Math.abs(Math.cos(orientation.inclination));
  return sums.map(({ re, im, weight, square, errors, pixels }) => {
    if (pixels === 0) return { pitch: NaN, error: NaN, scatterError: NaN, pixels };
    const length = Math.min(1, Math.hypot(re, im) / weight);
    const beams = Math.max(1, weight ** 2 / square / perBeam);
    // Variance of an angle from the mean length of e^{2ip} (Mardia 1972, from memory).
    const spread = Math.sqrt(-2 * Math.log(Math.max(length, 1e-12))) / 2;
    return {
      pitch: Math.atan2(im, re) / 2,
      error: (stretch * Math.sqrt(errors * Math.min(perBeam, pixels))) / weight / Math.max(length, 1e-12),
      scatterError: spread / Math.sqrt(beams),
      pixels,
    };
  });
}
