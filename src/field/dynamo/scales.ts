import type { MeridionalGrid } from './grid.ts';
import { discretise, type DynamoOperator } from './operator.ts';
import type { DynamoProfiles } from './profiles.ts';
import { multiplySparse } from '../../math/sparse.ts';

/**
 * A bound on growth rates and frequencies that matter, per kpc s/km: from the local dispersion relation
 * rate = sqrt(i alpha G k) - eta k^2 of dynamo waves (G the shear; Parker 1955) a growing wave has a
 * frequency below (alpha G/2)^(2/3) eta^(-1/3); rotation apart, growth is below alpha^2/(4 eta).
 * At least the rate at which diffusion acts over the volume.
 */
export function rateScale({ grid, alpha, shear, diffusivity }: DynamoOperator): number {
  let largest = 0;
  for (let k = 0; k < alpha.length; k++) {
    const waves = ((Math.abs(alpha[k]) * shear[k]) / 2) ** (2 / 3) / Math.cbrt(diffusivity[k]);
    largest = Math.max(largest, waves + alpha[k] ** 2 / (4 * diffusivity[k]));
  }
  const least = diffusivity.reduce((low, value) => Math.min(low, value), Infinity);
  const size = Math.min(insideHeight(grid), grid.kind === 'disc' ? grid.radiiKpc[grid.insideRadial] : Infinity);
  return Math.max(largest, least * (Math.PI / size) ** 2);
}

function insideHeight({ heightsKpc, insideVertical }: MeridionalGrid): number {
  const middle = heightsKpc.findIndex((z) => z >= 0);
  return heightsKpc[middle + insideVertical];
}

/** The rate at which diffusion alone would destroy an azimuthal field, per kpc s/km: errors of growth rates are judged by it. */
export function diffusionRate({ grid, unknowns }: DynamoOperator, profiles: DynamoProfiles, x: Float64Array): number {
  const none = (): number => 0;
  const { motion } = discretise(grid, { ...profiles, angularSpeed: none, windRadial: none, windVertical: none, alpha: none });
  const lost = multiplySparse(motion, x);
  let [power, loss] = [0, 0];
  unknowns.azimuthal.forEach((place, node) => {
    if (place < 0) return;
    const i = node % grid.radiiKpc.length;
    const weight = grid.radiiKpc[i] * (i <= grid.insideRadial ? 1 : 0);
    power += weight * x[place] ** 2;
    loss -= weight * x[place] * lost[place];
  });
  return power > 0 ? loss / power : 0;
}
