/** Three numbers along axes that the name of the value tells. */
export type Vector3 = readonly [number, number, number];

/**
 * Orientation of a galaxy on the sky (physics.md section 2). Sky axes are (N, E, k): north, east,
 * and towards the observer; galaxy axes x along the receding half of the line of nodes, z along the
 * spin, y = z × x.
 */
export interface Frame {
  readonly cosInclination: number;
  readonly sinInclination: number;
  readonly cosPositionAngle: number;
  readonly sinPositionAngle: number;
}

/** The frame of a galaxy from its inclination and position angle, rad; exact at multiples of 90 deg. */
export function frameOf(inclination: number, positionAngle: number): Frame {
  const [cosInclination, sinInclination] = cosSin(inclination);
  const [cosPositionAngle, sinPositionAngle] = cosSin(positionAngle);
  return { cosInclination, sinInclination, cosPositionAngle, sinPositionAngle };
}

/**
 * A vector, or the point of a ray at offset (north, east) and depth s towards the observer, given
 * in sky axes (N, E, k) → galaxy axes (x, y, z), same unit.
 */
export function galaxyFromSky(frame: Frame, [north, east, towards]: Vector3): Vector3 {
  const { cosInclination: ci, sinInclination: si, cosPositionAngle: cp, sinPositionAngle: sp } = frame;
  const across = east * cp - north * sp;
  return [north * cp + east * sp, across * ci - towards * si, across * si + towards * ci];
}

/** A vector or point in galaxy axes (x, y, z) → sky axes (N, E, k), same unit. */
export function skyFromGalaxy(frame: Frame, [x, y, z]: Vector3): Vector3 {
  const { cosInclination: ci, sinInclination: si, cosPositionAngle: cp, sinPositionAngle: sp } = frame;
  const across = y * ci + z * si;
  return [x * cp - across * sp, x * sp + across * cp, z * ci - y * si];
}

/** Cosine and sine; at multiples of a quarter turn exactly 0, 1 or -1. */
function cosSin(angle: number): readonly [number, number] {
  const quarters = Math.round(angle / (Math.PI / 2));
  // Degrees turned into radians may miss the quarter turn by a rounding.
  if (Math.abs(angle - quarters * (Math.PI / 2)) <= 4 * Number.EPSILON * Math.max(1, Math.abs(angle))) {
    const [c, s] = ([[1, 0], [0, 1], [-1, 0], [0, -1]] as const)[((quarters % 4) + 4) % 4];
    return [c, s];
  }
  return [Math.cos(angle), Math.sin(angle)];
}
