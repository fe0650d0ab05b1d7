import { gamma, kummerOfMinus } from '../math/special.ts';
import { makeTable, type Table } from '../math/table.ts';

/**
 * Moments of the field in the plane of the sky when isotropic turbulence of rms σ per component
 * lies on top of B_⊥ (two-dimensional Rice distribution; physics.md section 3). With q = (p+1)/2,
 * m = B_⊥² + 2σ² and u = B_⊥²/m the moments are
 *
 *     ⟨B^q⟩       = m^{q/2} · total(u)
 *     ⟨B^q cos2θ⟩ = m^{q/2} · u · aligned(u)
 *
 * where both functions are smooth on [0, 1] and become 1 at u = 1 (no turbulence).
 */
export interface RiceTables {
  readonly total: Table;
  readonly aligned: Table;
}

/** total(u) of RiceTables: Γ(1+q/2) (1-u)^{q/2} ₁F₁(-q/2; 1; -u/(1-u)). */
export function riceTotal(q: number, u: number): number {
  if (u >= 1) return 1;
  return gamma(1 + q / 2) * Math.pow(1 - u, q / 2) * kummerOfMinus(-q / 2, 1, u / (1 - u));
}

/** aligned(u) of RiceTables: ½ Γ(2+q/2) (1-u)^{q/2-1} ₁F₁(1-q/2; 3; -u/(1-u)). */
export function riceAligned(q: number, u: number): number {
  if (u >= 1) return 1;
  return 0.5 * gamma(2 + q / 2) * Math.pow(1 - u, q / 2 - 1) * kummerOfMinus(1 - q / 2, 3, u / (1 - u));
}

/** What both tables are like. */
export const riceTableShape = { pieces: 64, degree: 11 } as const;

const cache = new Map<number, RiceTables>();

/** Both functions tabulated for an electron index p; accurate to 1e-12. */
export function riceTables(index: number): RiceTables {
  const { pieces, degree } = riceTableShape;
  const known = cache.get(index);
  if (known) return known;
  const q = (index + 1) / 2;
  const tables = {
    total: makeTable((u) => riceTotal(q, u), pieces, degree),
    aligned: makeTable((u) => riceAligned(q, u), pieces, degree),
  };
  if (cache.size > 64) cache.clear();
  cache.set(index, tables);
  return tables;
}
