import { sobolSequence, type SobolSequence } from '../math/sobol.ts';
import { between } from './axis.ts';
import type { SweepAxis, SweepPlan } from './types.ts';

/** Where one point of a sweep lies: which variant, and the value of every axis in its unit. */
export interface SweepPoint {
  readonly variant: number;
  readonly values: Float64Array;
}

/** Points of one variant: the whole grid, the Sobol points, or d + 2 for each base sample. */
export function pointsPerVariant({ design, axes, samples }: Pick<SweepPlan, 'design' | 'axes' | 'samples'>): number {
  if (design === 'sobol') return samples;
  if (design === 'sensitivity') return samples * (axes.length + 2);
  return axes.reduce((product, { values }) => product * values.length, 1);
}

/** Points of the whole sweep, without realisations. */
export function pointCount(plan: Pick<SweepPlan, 'design' | 'axes' | 'samples' | 'variants'>): number {
  return plan.variants.length * pointsPerVariant(plan);
}

/** Rows of the whole sweep: every point, with each of its realisations. */
export function rowCount(plan: Pick<SweepPlan, 'design' | 'axes' | 'samples' | 'variants' | 'realisations'>): number {
  return pointCount(plan) * Math.max(1, plan.realisations);
}

/**
 * The points of a sweep by number, each without those before it; variants follow one another. Grid: the
 * last axis runs fastest. Sobol: scrambled points (Joe & Kuo 2008). Sensitivity: A, B and every A with
 * one axis from B, sample after sample (Saltelli et al. 2010), from Sobol points of twice the axes.
 */
export function makeDesign(plan: Pick<SweepPlan, 'design' | 'axes' | 'samples' | 'seed'>): (point: number) => SweepPoint {
  const per = pointsPerVariant(plan);
  const cube = cubeOf(plan);
  return (point) => {
    const inside = point % per;
    const share = cube(inside);
    return { variant: Math.floor(point / per), values: Float64Array.from(plan.axes, (axis, k) => axisAt(axis, share[k], plan.design === 'grid')) };
  };
}

/** The step of every axis of a grid at a point of one variant. */
export function gridSteps(axes: readonly SweepAxis[], inside: number): number[] {
  const steps = new Array<number>(axes.length);
  let rest = inside;
  for (let k = axes.length - 1; k >= 0; k--) {
    steps[k] = rest % axes[k].values.length;
    rest = Math.floor(rest / axes[k].values.length);
  }
  return steps;
}

/** Grid: step numbers; else coordinates in the unit cube. */
function cubeOf({ design, axes, seed }: Pick<SweepPlan, 'design' | 'axes' | 'seed'>): (inside: number) => ArrayLike<number> {
  const d = axes.length;
  if (design === 'grid' || d === 0) return (inside) => gridSteps(axes, inside);
  if (design === 'sobol') {
    const sequence = sobolSequence(d, seed);
    return (inside) => sequence.point(inside);
  }
  const sequence: SobolSequence = sobolSequence(2 * d, seed);
  return (inside) => {
    const both = sequence.point(Math.floor(inside / (d + 2)));
    const which = inside % (d + 2);
    return Float64Array.from({ length: d }, (_, k) => both[which === 1 || which === k + 2 ? d + k : k]);
  };
}

function axisAt({ values, spacing }: SweepAxis, share: number, isStep: boolean): number {
  if (isStep) return values[share];
  if (spacing === 'list') return values[Math.min(values.length - 1, Math.floor(share * values.length))];
  return between(values[0], values[1], spacing, share);
}
