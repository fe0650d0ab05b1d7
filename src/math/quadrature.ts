/** Nodes and weights of a rule on [-1, 1]: the integral of f is near sum weights[k] f(nodes[k]). */
export interface QuadratureRule {
  readonly nodes: Float64Array;
  readonly weights: Float64Array;
}

const rules = new Map<number, QuadratureRule>();

/**
 * The Gauss-Legendre rule of `count` nodes on [-1, 1], in rising order: exact for polynomials up to
 * degree 2 count - 1. Throws RangeError for anything but a whole number of at least 1.
 * Newton's iteration on the Legendre polynomial (Abramowitz & Stegun 1964, 25.4.29).
 */
export function gaussLegendre(count: number): QuadratureRule {
  if (!Number.isInteger(count) || count < 1) {
    throw new RangeError(`a Gauss-Legendre rule needs a whole number of nodes of at least 1, not ${count}`);
  }
  let rule = rules.get(count);
  if (!rule) {
    rule = computeRule(count);
    rules.set(count, rule);
  }
  return rule;
}

function computeRule(count: number): QuadratureRule {
  const nodes = new Float64Array(count);
  const weights = new Float64Array(count);
  for (let k = 0; k < Math.ceil(count / 2); k++) {
    // Tricomi's guess is close enough for Newton's iteration to converge to its root.
    let x = Math.cos((Math.PI * (k + 0.75)) / (count + 0.5));
    for (let iteration = 0; iteration < 50; iteration++) {
      const [value, slope] = legendre(count, x);
      const step = value / slope;
      x -= step;
      if (Math.abs(step) < 1e-15) break;
    }
    if (count % 2 === 1 && k === (count - 1) / 2) x = 0;
    const slope = legendre(count, x)[1];
    nodes[k] = -x;
    nodes[count - 1 - k] = x;
    weights[k] = weights[count - 1 - k] = 2 / ((1 - x * x) * slope * slope);
  }
  return { nodes, weights };
}

/** P_n(x) and its derivative, by the three-term recurrence. */
function legendre(n: number, x: number): [value: number, slope: number] {
  let previous = 1;
  let value = x;
  for (let k = 2; k <= n; k++) {
    [previous, value] = [value, ((2 * k - 1) * x * value - (k - 1) * previous) / k];
  }
  return [value, (n * (x * value - previous)) / (x * x - 1)];
}
