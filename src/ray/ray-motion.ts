/** Arithmetic that motions are written in: on numbers, or on nodes of a graph. */
export interface Arithmetic<T> {
  readonly add: (a: T, b: T) => T;
  readonly multiply: (a: T, b: T) => T;
  readonly negate: (a: T) => T;
  readonly zero: T;
}

/** A point of a ray in the galaxy frame, kpc, how the galaxy is turned, and 1/distance, kpc^-1. */
export interface RayPoint<T> {
  readonly x: T;
  readonly y: T;
  readonly z: T;
  readonly sinI: T;
  readonly cosI: T;
  readonly perDistance: T;
}

/**
 * Velocity (dx, dy, dz) of the point of a pixel's ray at fixed s when a number of the scene's galaxy
 * changes: kpc per rad, or per kpc of distance. From x = major, y = minor cos i - s sin i,
 * z = minor sin i + s cos i (design/physics.md section 2), in which the inclination turns points about
 * the major axis, the position angle turns (major, minor) about the line of sight, and the distance
 * stretches both.
 */
export type RayMotion = <T>(on: Arithmetic<T>, at: RayPoint<T>) => readonly [T, T, T];

/** The motions, by the path of the number that makes them. */
export const rayMotions: Readonly<Record<string, RayMotion>> = {
  'galaxy.inclination': (on, { y, z }) => [on.zero, on.negate(z), y],
  'galaxy.positionAngle': (on, { x, y, z, sinI, cosI }) => [
    on.add(on.multiply(cosI, y), on.multiply(sinI, z)),
    on.negate(on.multiply(cosI, x)),
    on.negate(on.multiply(sinI, x)),
  ],
  'galaxy.distance': (on, { x, y, z, sinI, cosI, perDistance }) => {
    const minor = on.multiply(perDistance, on.add(on.multiply(cosI, y), on.multiply(sinI, z)));
    return [on.multiply(perDistance, x), on.multiply(cosI, minor), on.multiply(sinI, minor)];
  },
};

/** Arithmetic on numbers. */
export const onNumbers: Arithmetic<number> = { add: (a, b) => a + b, multiply: (a, b) => a * b, negate: (a) => -a, zero: 0 };
