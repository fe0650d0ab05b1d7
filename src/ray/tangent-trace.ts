import { sixthOrderSlope } from '../math/slope.ts';
import type { Scene } from '../scene/types.ts';
import { brightnessPerKpc, intrinsicPolarization } from './synchrotron.ts';
import type { TangentIntegrand } from './tangent-integrand.ts';
import type { TangentSums } from './tangent-sums.ts';
import type { RaySums } from './ray-sums.ts';
import type { RayTangents } from './types.ts';

/** Steps of the differences that the smooth laws of the index are differentiated by; they leave 1e-12. */
const indexStep = 0.02;

/** A function that writes the derivatives of a ray, made of raw sums, to their place among `rays`. */
export function tangentWriter(
  { parameters }: TangentIntegrand,
  scene: Scene,
  frequenciesHz: readonly number[],
  rays: number,
): (ray: number, sums: RaySums, tangents: TangentSums, result: RayTangents) => void {
  const { index } = scene.cosmicRays;
  const total = (p: number, frequency: number): number => brightnessPerKpc(p, frequency);
  const polarized = (p: number, frequency: number): number => brightnessPerKpc(p, frequency) * intrinsicPolarization(p);
  const factors = [total, polarized].map((law) => frequenciesHz.map((frequency) => law(index, frequency)));
  const byIndex = [total, polarized].map((law) => frequenciesHz.map((frequency, k) => {
    const size = law(index, frequency);
    return factors[0][k] === 0 ? 0 : size * sixthOrderSlope((p) => Math.log(law(p, frequency)), index, indexStep);
  }));
  const turn = 2 * scene.galaxy.positionAngle;
  const [sine, cosine] = [Math.sin(turn), Math.cos(turn)];
  const count = frequenciesHz.length;
  return (ray, sums, tangents, result) => {
    parameters.forEach(({ path }, p) => {
      const followsIndex = path === 'cosmicRays.index' ? 1 : 0;
      const turns = path === 'galaxy.positionAngle' ? 2 : 0;
      for (let k = 0; k < count; k++) {
        const at = p * count + k;
        const slope = (law: 0 | 1, derivative: number, value: number): number => factors[law][k] * derivative + followsIndex * byIndex[law][k] * value;
        const place = at * rays + ray;
        result.I[place] = slope(0, tangents.total[at], sums.total[k]);
        const major = slope(1, tangents.cosine[at], sums.cosine[k]) - turns * factors[1][k] * sums.sine[k];
        const minor = slope(1, tangents.sine[at], sums.sine[k]) + turns * factors[1][k] * sums.cosine[k];
        result.Q[place] = cosine * major - sine * minor;
        result.U[place] = sine * major + cosine * minor;
      }
      result.faradayDepth[p * rays + ray] = tangents.faradayDepth[p];
    });
  };
}
