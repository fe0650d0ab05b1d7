import type { Graph, NodeId } from '../formula/graph.ts';
import { gamma } from '../math/special.ts';
import { smallestFieldSquared } from './field-size.ts';

/**
 * Moments of the field across the line of sight where an ordered random field of changing sign (a
 * Gaussian of zero mean along one direction) and isotropic turbulence lie on top of a regular one.
 * Gauss–Hermite quadrature converges slowly, since |B|^q has a kink where the field vanishes.
 * Instead Euler's integral B^{q-4} = ∫ t^{1-q/2} e^{-tB²} dt/Γ(2-q/2) turns every moment into one
 * integral of Gaussian moments, all in closed form, of a smooth function of ln t, for which equal
 * steps converge exponentially (own derivation; checked against scipy and Monte Carlo).
 */
export interface OrderedField {
  /** rms times the unit vector of its direction, along the axes of the sky, uG. */
  readonly major: NodeId;
  readonly minor: NodeId;
  /** How many steps of ln t. */
  readonly steps: number;
}

/** Steps of ln t from `start` on, with the weight that all have in common. */
export interface OrderedSteps {
  readonly count: number;
  readonly start: number;
  readonly step: number;
  /** step/Γ(2-q/2). */
  readonly weight: number;
}

/** Share of the tolerance that the steps may be wrong by. */
const shareOfTolerance = 0.1;
const smallestError = 1e-13;

/**
 * The steps that keep moments exact to a tenth of the tolerance for an electron index p. The
 * integrand falls as t^{2-q/2} at small t, at large t as t^{-1/2-q/2} at the slowest, and is
 * analytic within |Im ln t| < π/2, so that equal steps h are wrong by e^{-π²/h}, times 25 at most as
 * found for fields without a random part, whose integrand ends most sharply.
 */
export function orderedSteps(index: number, tolerance: number): OrderedSteps {
  const q = (index + 1) / 2;
  const digits = -Math.log(Math.max(smallestError, shareOfTolerance * tolerance));
  const step = Math.PI ** 2 / (digits + Math.log(25));
  const [below, above] = [digits / (2 - q / 2), digits / (0.5 + q / 2)];
  return { count: Math.ceil((below + above) / step) + 1, start: -below, step, weight: step / gamma(2 - q / 2) };
}

/** Adds the three moments of `fieldMoments` to the graph; run-time parameters are `ordered/start`, `ordered/step`, `ordered/weight`. */
export function addOrderedMoments(
  g: Graph,
  regular: { readonly major: NodeId; readonly minor: NodeId; readonly rms?: NodeId },
  ordered: OrderedField,
): readonly [NodeId, NodeId, NodeId] {
  const square = (node: NodeId): NodeId => g.power(node, 2);
  const times = (factor: number, ...nodes: readonly NodeId[]): NodeId => g.multiply(g.constant(factor), ...nodes);
  const halfPower = g.parameter('halfPower');
  const isotropic = regular.rms === undefined ? g.constant(0) : square(regular.rms);
  const { major: m1, minor: m2 } = regular;
  const { major: e1, minor: e2 } = ordered;
  const [m, e] = [g.add(square(m1), square(m2)), g.add(square(e1), square(e2))];
  // All squares over their sum, so that the steps of ln t fit fields of any strength.
  const size = g.add(m, e, times(2, isotropic), g.constant(smallestFieldSquared));
  const [meanSquare, alongSquare, spread] = [m, e, isotropic].map((node) => g.divide(node, size));
  const overlap = g.divide(g.add(g.multiply(m1, e1), g.multiply(m2, e2)), size);

  // Coefficients of m m, m e + e m, e e and 1 in ⟨B² B_i B_j e^{-tB²}⟩, summed over the steps.
  const sums: { readonly mm: NodeId[]; readonly me: NodeId[]; readonly ee: NodeId[]; readonly unit: NodeId[] } = { mm: [], me: [], ee: [], unit: [] };
  for (let k = 0; k < ordered.steps; k++) {
    const logT = g.add(g.parameter('ordered/start'), times(k, g.parameter('ordered/step')));
    const t = g.unary('exp', logT);
    const weight = g.multiply(g.parameter('ordered/weight'), g.unary('exp', g.multiply(g.subtract(g.constant(2), halfPower), logT)));
    // Under e^{-tB²} a Gaussian stays one, of covariance σ' + ρ e e and mean (m - β (e·m) e)/α.
    const alpha = g.add(g.constant(1), times(2, t, spread));
    const wide = g.add(alpha, times(2, t, alongSquare));
    const beta = g.divide(times(2, t), wide);
    const rho = g.power(g.multiply(alpha, wide), -1);
    const variance = g.divide(spread, alpha);
    const onE = g.divide(overlap, wide);
    const slant = g.multiply(beta, overlap);
    const meanNorm = g.divide(g.add(meanSquare, times(-2, slant, overlap), g.multiply(square(slant), alongSquare)), square(alpha));
    const trace = g.add(meanNorm, times(2, variance), g.multiply(rho, alongSquare));
    const exponent = g.negate(g.divide(g.multiply(t, g.subtract(meanSquare, g.multiply(slant, overlap))), alpha));
    const share = g.multiply(weight, g.unary('exp', exponent), g.power(rho, 0.5));
    const mean = g.add(trace, times(4, variance));
    const cross = times(2, rho, onE);
    sums.mm.push(g.multiply(share, mean, g.power(alpha, -2)));
    sums.me.push(g.multiply(share, g.subtract(g.divide(cross, alpha), g.multiply(mean, slant, g.power(alpha, -2)))));
    sums.ee.push(
      g.multiply(
        share,
        g.add(
          g.multiply(mean, square(slant), g.power(alpha, -2)),
          times(-2, cross, slant, g.power(alpha, -1)),
          g.multiply(mean, rho),
          times(2, square(rho), alongSquare),
        ),
      ),
    );
    sums.unit.push(g.multiply(share, g.add(g.multiply(trace, variance), times(2, square(variance)))));
  }
  const [mm, me, ee, unit] = [sums.mm, sums.me, sums.ee, sums.unit].map((terms) => g.add(...terms));
  const scale = g.binary('pow', size, halfPower);
  const perSize = g.divide(scale, size);
  const total = g.multiply(scale, g.add(g.multiply(mm, meanSquare), times(2, me, overlap), g.multiply(ee, alongSquare), times(2, unit)));
  const cosine = g.add(
    g.multiply(mm, g.subtract(square(m2), square(m1))),
    times(2, me, g.subtract(g.multiply(m2, e2), g.multiply(m1, e1))),
    g.multiply(ee, g.subtract(square(e2), square(e1))),
  );
  const sine = g.add(g.multiply(mm, m1, m2), g.multiply(me, g.add(g.multiply(m1, e2), g.multiply(m2, e1))), g.multiply(ee, e1, e2));
  return [total, g.multiply(perSize, cosine), times(-2, perSize, sine)];
}
