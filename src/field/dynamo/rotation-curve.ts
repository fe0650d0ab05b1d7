import { naturalSpline } from '../../math/natural-spline.ts';
import { InputError } from '../../units/input-error.ts';
import type { Profile } from './profiles.ts';

/** A measured rotation curve: ascending radii with speeds. */
export interface RotationCurve {
  readonly radiiKpc: readonly number[];
  readonly speedsKms: readonly number[];
}

const fewestPoints = 4;

/**
 * Omega in km/s/kpc from a curve: a cubic spline through its points and through rest on the axis, the last
 * speed beyond. Throws InputError, without a place, where the curve is no function of radius.
 */
export function angularSpeedOf({ radiiKpc, speedsKms }: RotationCurve): Profile {
  if (radiiKpc.length !== speedsKms.length) throw new InputError(`${radiiKpc.length} radii and ${speedsKms.length} speeds are given; as many of both are wanted`);
  if (radiiKpc.length < fewestPoints) throw new InputError(`a rotation curve of ${radiiKpc.length} points is given; at least ${fewestPoints} are wanted`);
  radiiKpc.forEach((radius, k) => {
    const numbers = `radius ${radius} kpc, speed ${speedsKms[k]} km/s`;
    if (!Number.isFinite(radius) || !Number.isFinite(speedsKms[k])) throw new InputError(`point ${k + 1} of the rotation curve (${numbers}) is not finite`);
    if (radius < 0) throw new InputError(`point ${k + 1} of the rotation curve has the radius ${radius} kpc, less than 0`);
    if (k > 0 && !(radius > radiiKpc[k - 1])) throw new InputError(`radii must ascend, but point ${k + 1} of the rotation curve lies at ${radius} kpc and the one before at ${radiiKpc[k - 1]} kpc`);
    if (radius === 0 && speedsKms[k] !== 0) throw new InputError(`the rotation curve has ${speedsKms[k]} km/s on the axis, where the speed is 0`);
  });
  const starts = radiiKpc[0] === 0;
  const curve = naturalSpline(starts ? radiiKpc : [0, ...radiiKpc], starts ? speedsKms : [0, ...speedsKms]);
  const small = 1e-4 * radiiKpc[starts ? 1 : 0];
  return (r) => curve.value(Math.max(r, small)) / Math.max(r, small);
}
