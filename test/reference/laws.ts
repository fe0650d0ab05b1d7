import type { CheckId } from './check-rows.ts';

/** A row of the check values that one law of P(lambda^2) gives. */
export interface LawRow {
  readonly id: CheckId;
  readonly law: string;
  /** All parameters but p = 1 and chi = 0, in order. */
  readonly values: readonly number[];
  readonly lambda2: number;
  /** Which number of the row is |P|/p0; default the first. */
  readonly at?: number;
  /** The row's second number is chi, rad, up to half turns. */
  readonly hasAngle?: boolean;
}

const square = 0.0441;

export const lawRows: readonly LawRow[] = [
  { id: '5.slab.R50.l2_0.01', law: 'burn-slab', values: [50], lambda2: 0.01, hasAngle: true },
  { id: '5.slab.R50.l2_0.0441', law: 'burn-slab', values: [50], lambda2: square, hasAngle: true },
  { id: '5.slab.R20.l2_0.0441', law: 'burn-slab', values: [20], lambda2: square, hasAngle: true },
  { id: '5.slab.R100.l2_0.0441', law: 'burn-slab', values: [100], lambda2: square, hasAngle: true },
  { id: '5.ext.s10.l2_0.0441', law: 'external-dispersion', values: [0, 10], lambda2: square },
  { id: '5.ext.s20.l2_0.0441', law: 'external-dispersion', values: [0, 20], lambda2: square },
  { id: '5.ext.s50.l2_0.0441', law: 'external-dispersion', values: [0, 50], lambda2: square },
  { id: '5.ext.s50.l2_0.01', law: 'external-dispersion', values: [0, 50], lambda2: 0.01 },
  { id: '5.int.R0.s20.l2_0.0441', law: 'internal-dispersion', values: [0, 20], lambda2: square, hasAngle: true },
  { id: '5.int.R50.s20.l2_0.0441', law: 'internal-dispersion', values: [50, 20], lambda2: square, hasAngle: true },
  { id: '5.int.R50.s20.l2_0.01', law: 'internal-dispersion', values: [50, 20], lambda2: 0.01, hasAngle: true },
  { id: '5.int.R20.s10.l2_0.0441', law: 'internal-dispersion', values: [20, 10], lambda2: square, hasAngle: true },
  { id: '5.int.R50.s0.l2_0.0441', law: 'internal-dispersion', values: [50, 0], lambda2: square, hasAngle: true },
  { id: '5.exp.q0.5', law: 'exponential-disc', values: [50, 0.5], lambda2: square },
  { id: '5.exp.q1', law: 'exponential-disc', values: [50, 1], lambda2: square },
  { id: '5.exp.q2', law: 'exponential-disc', values: [50, 2], lambda2: square },
  { id: '5.helix.D-1.5', law: 'twisted-slab', values: [20, -1.5], lambda2: square },
  { id: '5.helix.D0', law: 'twisted-slab', values: [20, 0], lambda2: square },
  { id: '5.helix.D1.5', law: 'twisted-slab', values: [20, 1.5], lambda2: square },
  { id: '5.tribble.s20.x0', law: 'tribble-screen', values: [0, 20, 0], lambda2: square },
  { id: '5.tribble.s20.x0.5', law: 'tribble-screen', values: [0, 20, 0.5], lambda2: square },
  { id: '5.tribble.s20.x1', law: 'tribble-screen', values: [0, 20, 1], lambda2: square },
  { id: '5.tribble.s20.x3', law: 'tribble-screen', values: [0, 20, 3], lambda2: square },
  { id: '5.tribble.s50.x0.5', law: 'tribble-screen', values: [0, 50, 0.5], lambda2: square },
  { id: '5.tribble.s50.x3', law: 'tribble-screen', values: [0, 50, 3], lambda2: square },
  { id: '5.partial.f0.5.s20', law: 'partial-cover', values: [0, 20, 0.5], lambda2: square },
  { id: '5.partial.f0.5.s50', law: 'partial-cover', values: [0, 50, 0.5], lambda2: square },
  { id: '5.partial.f0.9.s20', law: 'partial-cover', values: [0, 20, 0.9], lambda2: square },
  { id: '5.partial.f0.9.s50', law: 'partial-cover', values: [0, 50, 0.9], lambda2: square },
  { id: '5.partial.f0.5.s20', law: 'resolved-cover', values: [0, 20, 0.5], lambda2: square, at: 1 },
  { id: '5.partial.f0.5.s50', law: 'resolved-cover', values: [0, 50, 0.5], lambda2: square, at: 1 },
  { id: '5.partial.f0.9.s20', law: 'resolved-cover', values: [0, 20, 0.9], lambda2: square, at: 1 },
  { id: '5.partial.f0.9.s50', law: 'resolved-cover', values: [0, 50, 0.9], lambda2: square, at: 1 },
  { id: '5.grad.g10', law: 'depth-gradient', values: [0, 10], lambda2: square },
  { id: '5.grad.g30', law: 'depth-gradient', values: [0, 30], lambda2: square },
  // A slit sees the depths of a gradient as evenly as a slab its own.
  { id: '5.grad.g10', law: 'asymmetric-slab', values: [0, 10], lambda2: square, at: 1 },
  { id: '5.grad.g30', law: 'asymmetric-slab', values: [0, 30], lambda2: square, at: 1 },
];

/** Two slabs, far (p 0.6, chi 0.3, 40 rad m^-2) and near (0.4, 1.0, -25): Q, U and |P| at these lambda^2. */
export const twoSlabRows = [
  ['5.two.l2_0', 0],
  ['5.two.l2_0.01', 0.01],
  ['5.two.l2_0.0441', square],
] as const satisfies readonly (readonly [CheckId, number])[];
