import { addAlphaTerms, type DynamoOperator } from './operator.ts';
import { multiplySparse } from '../../math/sparse.ts';
import { potentialGradient } from './stencils.ts';
import { nodeField, type NodeField } from './unknowns.ts';

/** Poloidal components at every node, uG: B_r = -dA/dz, B_z = (1/r) d(rA)/dr. */
export interface PoloidalField {
  readonly radial: Float64Array;
  readonly vertical: Float64Array;
}

/** The poloidal field of a potential given at every node. */
export type PoloidalOf = (potential: Float64Array) => PoloidalField;

/** Prepares the slopes of a grid once, for many potentials. */
export function preparePoloidal({ grid }: Pick<DynamoOperator, 'grid'>): PoloidalOf {
  const nr = grid.radiiKpc.length;
  const count = nr * grid.heightsKpc.length;
  const slopes = Array.from({ length: count }, (_, node) => potentialGradient(grid, node % nr, Math.floor(node / nr)));
  const apply = (along: 'radial' | 'vertical', factor: number, potential: Float64Array): Float64Array =>
    Float64Array.from(slopes, (slope) => {
      let sum = 0;
      for (const { node, weight } of slope[along]) sum += weight * potential[node];
      return factor * sum;
    });
  return (potential) => ({ radial: apply('vertical', -1, potential), vertical: apply('radial', 1, potential) });
}

/** alpha as the field leaves it and its slope by the azimuthal field, at the nodes. */
export interface QuenchedAlpha {
  readonly alpha: Float64Array;
  readonly slope: Float64Array;
}

/** alpha/(1 + B^2/B_eq^2), B the whole mean field (algebraic quenching; e.g. Brandenburg & Subramanian 2005, section 9). */
export function quenchAlpha({ alpha, equipartition }: DynamoOperator, { azimuthal }: NodeField, { radial, vertical }: PoloidalField): QuenchedAlpha {
  const quenched = new Float64Array(alpha.length);
  const slope = new Float64Array(alpha.length);
  for (let k = 0; k < alpha.length; k++) {
    const scale = equipartition[k] ** 2;
    const left = 1 / (1 + (azimuthal[k] ** 2 + radial[k] ** 2 + vertical[k] ** 2) / scale);
    quenched[k] = alpha[k] * left;
    slope[k] = (-2 * alpha[k] * left * left * azimuthal[k]) / scale;
  }
  return { alpha: quenched, slope };
}

/** dX/dt of the quenched equations, and alpha at that field. */
export function quenchedRate(operator: DynamoOperator, poloidalOf: PoloidalOf, x: Float64Array): { readonly rate: Float64Array; readonly quenched: QuenchedAlpha } {
  const field = nodeField(operator.unknowns, x);
  const quenched = quenchAlpha(operator, field, poloidalOf(field.potential));
  const rate = multiplySparse(operator.motion, x);
  addAlphaTerms(operator.alphaTerms, quenched.alpha, x, rate);
  return { rate, quenched };
}
