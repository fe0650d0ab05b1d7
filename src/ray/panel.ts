import { gaussLegendre } from '../math/quadrature.ts';

/** Samples in a panel. */
export const panelNodes = 8;

/** What a panel of Gauss–Legendre nodes on [-1, 1] needs, x rising towards the observer. */
export interface PanelRule {
  readonly nodes: Float64Array;
  readonly weights: Float64Array;
  /** [i * n + j]: ∫ from node i to 1 of the j-th Lagrange polynomial: depth between node and near end. */
  readonly toNearEnd: Float64Array;
  /** [k * n + j]: the weight of the value at node j in the k-th Legendre coefficient of a function. */
  readonly legendre: Float64Array;
}

/** The rule of `panelNodes` nodes. */
export const panelRule: PanelRule = makeRule(panelNodes);

function makeRule(n: number): PanelRule {
  const { nodes, weights } = gaussLegendre(n);
  // Legendre coefficients c_k = (2k+1)/2 Σ w_j P_k(x_j) f_j, then ∫_x^1 P_k = (P_{k-1} - P_{k+1})(x)/(2k+1).
  const legendre = Array.from(nodes, (x) => legendreUpTo(n, x));
  const toNearEnd = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      let sum = 0;
      for (let k = 0; k < n; k++) {
        const integral = k === 0 ? 1 - nodes[i] : (legendre[i][k - 1] - legendre[i][k + 1]) / (2 * k + 1);
        sum += ((2 * k + 1) / 2) * weights[j] * legendre[j][k] * integral;
      }
      toNearEnd[i * n + j] = sum;
    }
  }
  const rows = Float64Array.from({ length: n * n }, (_, index) => {
    const [k, j] = [Math.floor(index / n), index % n];
    return ((2 * k + 1) / 2) * weights[j] * legendre[j][k];
  });
  return { nodes, weights, toNearEnd, legendre: rows };
}

/** P_0 … P_count at x. */
function legendreUpTo(count: number, x: number): number[] {
  const p = [1, x];
  for (let k = 1; k < count; k++) p.push(((2 * k + 1) * x * p[k] - k * p[k - 1]) / (k + 1));
  return p;
}
