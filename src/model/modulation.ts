import type { Graph, NodeId } from '../formula/graph.ts';
import { coordinatesOf } from '../formula/vector-calculus.ts';
import type { ModelFormulas } from './types.ts';

/** What multiplies a component: nodes of the graph it is built in. */
export interface Modulation {
  /** Excess of the arms over the space between them, 0 where there is none: M - 1. */
  readonly arms?: NodeId;
  /** Rises from 0 on the axis to 1. */
  readonly hole?: NodeId;
}

/** Numbers of spiral arms, as nodes. */
export interface ArmNodes {
  readonly number: NodeId;
  /** atan(B_r/B_φ) of the arms, rad; negative for trailing ones. */
  readonly pitch: NodeId;
  /** κ of `armSharpness`. */
  readonly sharpness: NodeId;
  /** Azimuth of a ridge at the reference radius, rad. */
  readonly phase: NodeId;
  readonly amplitude: NodeId;
  readonly reference: NodeId;
  readonly innerRadius: NodeId;
}

/**
 * M - 1 = a (1 - e^{-(r/r_in)²}) S(ψ) with ψ = n (φ - φ_0 - ln(r/r_0)/tan p), along log-spirals; the
 * profile S is 1 on a ridge and 0 halfway between two (own definition): a periodic bell
 * (e^{κ cos ψ} - e^{-κ})/(e^κ - e^{-κ}), which is cos²(ψ/2) for κ → 0 and a Gaussian for large κ, and
 * smooth everywhere, as powers of a cosine are not.
 */
export function armExcess(g: Graph, arms: ArmNodes): NodeId {
  const { r, phi } = coordinatesOf(g);
  const winding = g.divide(g.unary('log', g.divide(r, arms.reference)), g.unary('tan', arms.pitch));
  const cosine = g.unary('cos', g.multiply(arms.number, g.add(phi, g.negate(arms.phase), g.negate(winding))));
  const less = (node: NodeId): NodeId => g.unary('expm1', g.negate(g.multiply(arms.sharpness, node)));
  const fall = g.unary('exp', g.multiply(arms.sharpness, g.subtract(cosine, g.constant(1))));
  const profile = g.divide(g.multiply(fall, less(g.add(g.constant(1), cosine))), less(g.constant(2)));
  return g.multiply(arms.amplitude, holeFactor(g, arms.innerRadius), profile);
}

/** 1 - e^{-(r/radius)²}. */
export function holeFactor(g: Graph, radius: NodeId): NodeId {
  const { r } = coordinatesOf(g);
  return g.negate(g.unary('expm1', g.negate(g.power(g.divide(r, radius), 2))));
}

/** Widest arms, κ → 0: the profile is cos²(ψ/2) to this. */
const leastSharpness = 1e-6;

/**
 * κ of arms of a full width at half maximum (rad of azimuth): ln(cosh κ)/κ = cos(n width/2). The
 * width is at most half the distance of two ridges, π/n.
 */
export function armSharpness(number: number, width: number): number {
  const wanted = Math.cos(Math.min((number * width) / 2, Math.PI / 2));
  const excess = (kappa: number): number => logCosh(kappa) / kappa - wanted;
  let [low, high] = [leastSharpness, 1];
  if (excess(low) >= 0) return leastSharpness;
  while (excess(high) < 0) high *= 2;
  for (let step = 0; step < 200 && high - low > 1e-15 * high; step++) {
    const middle = (low + high) / 2;
    if (excess(middle) < 0) low = middle;
    else high = middle;
  }
  return (low + high) / 2;
}

function logCosh(kappa: number): number {
  return kappa + Math.log1p(Math.exp(-2 * kappa)) - Math.LN2;
}

/** Height h(r) of a layer that flares; the given height is that at the reference radius. */
export function flaredHeight(g: Graph, law: 'exponential' | 'linear', height: NodeId, radius: NodeId, reference: NodeId): NodeId {
  const { r } = coordinatesOf(g);
  if (law === 'exponential') return g.multiply(height, g.unary('exp', g.divide(g.subtract(r, reference), radius)));
  return g.multiply(height, g.divide(g.add(radius, r), g.add(radius, reference)));
}

/** Why a model cannot have arms, or undefined where it can. */
export function armsProblem({ potential, euler, field, density, armPotential }: ModelFormulas): string | undefined {
  if (density !== undefined || armPotential) return undefined;
  if (!field && (potential || euler)) return undefined;
  return 'arms multiply a potential, so that the field stays free of divergence, and this model gives part of its field directly';
}

/** Why a model cannot have a central hole, or undefined where it can. */
export function holeProblem({ field }: ModelFormulas): string | undefined {
  if (!field || Object.keys(field).every((key) => key === 'phi')) return undefined;
  return 'a hole in a field that is given directly would have a divergence';
}
