import { sixthOrderSlope } from '../math/slope.ts';
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
const byIndexCache = new Map<number, RiceTables>();

/** Both functions tabulated for an electron index p, with their slopes in u; accurate to 1e-12. */
export function riceTables(index: number): RiceTables {
  const q = (index + 1) / 2;
  return kept(cache, index, () => tabulate((u) => riceTotal(q, u), (u) => riceAligned(q, u)));
}

/** Step in p of the differences that ∂/∂p is made of: functions of p this smooth leave 1e-13. */
const indexStep = 0.02;

/** ∂total/∂p and ∂aligned/∂p at fixed u, tabulated; accurate to 1e-11. */
export function riceTablesByIndex(index: number): RiceTables {
  const byIndex = (f: (q: number, u: number) => number) => (u: number) => sixthOrderSlope((p) => f((p + 1) / 2, u), index, indexStep);
  return kept(byIndexCache, index, () => tabulate(byIndex(riceTotal), byIndex(riceAligned)));
}

/** The table that an integrand knows by a name. */
export function findRiceTable(name: string, index: number): Table {
  switch (name) {
    case 'riceTotal':
      return riceTables(index).total;
    case 'riceAligned':
      return riceTables(index).aligned;
    case 'riceTotalByIndex':
      return riceTablesByIndex(index).total;
    case 'riceAlignedByIndex':
      return riceTablesByIndex(index).aligned;
    default:
      throw new Error(`there is no table ${name}`);
  }
}

function tabulate(total: (u: number) => number, aligned: (u: number) => number): RiceTables {
  const { pieces, degree } = riceTableShape;
  return { total: makeTable(total, pieces, degree, 2), aligned: makeTable(aligned, pieces, degree, 2) };
}

function kept(known: Map<number, RiceTables>, index: number, make: () => RiceTables): RiceTables {
  const found = known.get(index);
  if (found) return found;
  const tables = make();
  if (known.size > 64) known.clear();
  known.set(index, tables);
  return tables;
}
