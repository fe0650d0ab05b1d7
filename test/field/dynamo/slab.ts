import { slabGrid, type Parity } from '../../../src/field/dynamo/grid.ts';
import { discretise, type DynamoOperator } from '../../../src/field/dynamo/operator.ts';
import type { DynamoProfiles } from '../../../src/field/dynamo/profiles.ts';

/**
 * The one-dimensional limit in units of h and h²/eta: alpha = R_alpha f(z), r dOmega/dr = D/R_alpha. A
 * small R_alpha leaves alpha-omega alone, since the field scales with it.
 */
export function slab(dynamoNumber: number, f: (z: number) => number, options: { readonly rAlpha?: number; readonly cells?: number; readonly parity?: Parity } = {}): DynamoOperator {
  const { rAlpha = 1e-3, cells = 100, parity = 'even' } = options;
  return discretise(slabGrid(1, 1, cells, parity), slabProfiles(dynamoNumber, f, rAlpha));
}

/** The same as profiles: shear at r = 1 from Omega = (D/R_alpha) ln r. */
export function slabProfiles(dynamoNumber: number, f: (z: number) => number, rAlpha = 1e-3): DynamoProfiles {
  const none = (): number => 0;
  return {
    angularSpeed: (r) => (dynamoNumber / rAlpha) * Math.log(r),
    alpha: (_, z) => rAlpha * f(z),
    diffusivity: () => 1,
    windRadial: none,
    windVertical: none,
    equipartition: () => 1,
  };
}

/** alpha = sin(pi z) and alpha = z, the two profiles of the published checks. */
export const sine = (z: number): number => Math.sin(Math.PI * z);
export const linear = (z: number): number => z;
