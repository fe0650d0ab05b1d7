/** (mean over one half - mean over the other)/(their sum), with its error. */
export interface Asymmetry {
  readonly value: number;
  readonly error: number;
}

/** Which halves are compared: approaching against receding, or near against far. */
export type AsymmetryAxis = 'approaching-receding' | 'near-far';

/** Points closer than this to the line between the halves (in cos or sin) belong to neither. */
const borderline = 1e-9;

/**
 * The asymmetry of values over galaxy azimuth (rad): mean over cos phi < 0 (approaching) less mean
 * over cos phi > 0 (receding), over their sum; near-far likewise with sin phi < 0 (near) less
 * sin phi > 0 (far). Plain means; points on the line between the halves, and blanks, are left out.
 * Errors (independent, one per value; zero without) propagate to first order. NaN where a half has no
 * points or the sum is 0. Own definition, design/physics.md section 5.
 */
export function asymmetry(
  azimuth: ArrayLike<number>,
  values: ArrayLike<number>,
  errors: ArrayLike<number> | undefined,
  axis: AsymmetryAxis,
): Asymmetry {
  const halves = [
    { count: 0, sum: 0, variance: 0 },
    { count: 0, sum: 0, variance: 0 },
  ];
  for (let k = 0; k < values.length; k++) {
    const side = axis === 'approaching-receding' ? Math.cos(azimuth[k]) : Math.sin(azimuth[k]);
    if (Number.isNaN(values[k]) || Math.abs(side) < borderline) continue;
    const half = halves[side < 0 ? 0 : 1];
    half.count++;
    half.sum += values[k];
    half.variance += errors ? errors[k] ** 2 : 0;
  }
  const [a, b] = halves.map(({ count, sum }) => sum / count);
  const [errorA, errorB] = halves.map(({ count, variance }) => Math.sqrt(variance) / count);
  if (a + b === 0) return { value: NaN, error: NaN };
  return { value: (a - b) / (a + b), error: (2 * Math.hypot(b * errorA, a * errorB)) / (a + b) ** 2 };
}
