import { logSum } from '../../src/math/moments.ts';
import type { LogDensities } from '../../src/infer/log-density.ts';

/** A problem in the unit cube whose ln Z is known. */
export interface KnownEvidence {
  readonly name: string;
  readonly parameters: number;
  readonly logEvidence: number;
  readonly likelihood: LogDensities;
}

const batch = (one: (x: Float64Array) => number): LogDensities => async (points) => points.map(one);

/** Normalised unit Gaussian in [-10, 10]^D: ln Z = -D ln 20 (checks.md 13.gauss). */
export function gaussianBox(D: number): KnownEvidence {
  const likelihood = batch((u) => u.reduce((sum, value) => sum - (20 * value - 10) ** 2 / 2 - Math.log(2 * Math.PI) / 2, 0));
  return { name: `Gaussian in ${D} dimensions`, parameters: D, logEvidence: -D * Math.log(20), likelihood };
}

/** Two Gaussian shells, radius 2, width 0.1, at +-3.5 on the first axis, in [-6, 6]^D: checks.md 13.shell. */
export function gaussianShells(D: 2 | 5 | 10): KnownEvidence {
  const logEvidence = { 2: -1.74564187, 5: -5.67360124, 10: -14.5904911 }[D];
  const shell = (x: Float64Array, centre: number): number => {
    const r = Math.hypot(x[0] - centre, ...x.subarray(1));
    return -((r - 2) ** 2) / (2 * 0.01) - Math.log(2 * Math.PI * 0.01) / 2;
  };
  const likelihood = batch((u) => {
    const x = u.map((value) => 12 * value - 6);
    return logSum([shell(x, -3.5), shell(x, 3.5)]);
  });
  return { name: `two shells in ${D} dimensions`, parameters: D, logEvidence, likelihood };
}

/** L = exp[(2 + cos(x/2) cos(y/2))^5] in [0, 10 pi]^2: 18 peaks; checks.md 13.egg, exact 235.85594. */
export const eggBox: KnownEvidence = {
  name: 'egg-box',
  parameters: 2,
  logEvidence: 235.85594,
  likelihood: batch((u) => (2 + Math.cos(5 * Math.PI * u[0]) * Math.cos(5 * Math.PI * u[1])) ** 5),
};

/** A density with known moments: checks.md 13.rosen, a curved ridge. */
export const curvedRidge = {
  density: batch(([a, b]) => -(100 * (b - a * a) ** 2 + (1 - a) ** 2) / 20),
  means: [1, 11],
  variances: [10, 240.1],
  covariance: 20,
};

/** Correlated Gaussian, sigmas 1 and 100, correlation 0.95. */
export const correlatedGaussian = {
  density: batch(([a, b]) => {
    const [x, y] = [a - 3, (b + 50) / 100];
    return -(x * x - 2 * 0.95 * x * y + y * y) / (2 * (1 - 0.95 ** 2));
  }),
  means: [3, -50],
  variances: [1, 1e4],
  covariance: 95,
};
