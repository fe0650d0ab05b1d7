import { lambda2M2 } from './wavelength.ts';

/**
 * Turns Q and U in place by e^{2 i lambda^2 RM}, as a Faraday screen in front of the galaxy does.
 * Planes are [frequency * pixels + pixel]; the depth is one number or one per pixel, rad m^-2.
 * Source: Burn 1966.
 */
export function turnByForeground(
  Q: Float64Array,
  U: Float64Array,
  frequenciesHz: ArrayLike<number>,
  depth: number | Float64Array,
): void {
  const pixels = Q.length / frequenciesHz.length;
  for (let channel = 0, k = 0; channel < frequenciesHz.length; channel++) {
    const lambda2 = lambda2M2(frequenciesHz[channel]);
    for (let pixel = 0; pixel < pixels; pixel++, k++) {
      const angle = 2 * lambda2 * (typeof depth === 'number' ? depth : depth[pixel]);
      const [cos, sin] = [Math.cos(angle), Math.sin(angle)];
      [Q[k], U[k]] = [Q[k] * cos - U[k] * sin, Q[k] * sin + U[k] * cos];
    }
  }
}
