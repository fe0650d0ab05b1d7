import { expect, test } from 'vitest';
import { buildFormula } from '../../src/formula/build.ts';
import { Graph, type NodeId } from '../../src/formula/graph.ts';
import { interpretProgram } from '../../src/formula/javascript.ts';
import { lowerGraph } from '../../src/formula/lower.ts';
import {
  cartesianFromCylindrical,
  coordinatesOf,
  coordinateSubstitution,
  curlCartesian,
  curlCylindrical,
  eulerField,
  gradient,
  jacobian,
  type Vector,
} from '../../src/formula/vector-calculus.ts';
import { randomStream } from '../../src/math/random.ts';

const points = Array.from({ length: 12 }, (_, k) => {
  const stream = randomStream(7, 'vector-calculus', k);
  return [0, 1, 2].map(() => 6 * stream.uniform() - 3);
});

interface Setting {
  readonly graph: Graph;
  readonly c: ReturnType<typeof coordinatesOf>;
  build(text: string): NodeId;
  vector(x: string, y: string, z: string): Vector;
}

function setting(): Setting {
  const graph = new Graph();
  const c = coordinatesOf(graph);
  const scope = new Map<string, NodeId>(Object.entries(c));
  const build = (text: string): NodeId => buildFormula(graph, text, scope);
  return { graph, c, build, vector: (x, y, z) => [build(x), build(y), build(z)] };
}

function evaluate(graph: Graph, nodes: readonly NodeId[], point: readonly number[]): number[] {
  return interpretProgram(lowerGraph(graph, nodes, ['x', 'y', 'z'], coordinateSubstitution(graph)), new Float64Array(0), point);
}

/** Largest difference of two lists of nodes over the points, over the size of the first. */
function difference(graph: Graph, left: readonly NodeId[], right: readonly NodeId[]): number {
  let worst = 0;
  for (const point of points) {
    const [a, b] = [evaluate(graph, left, point), evaluate(graph, right, point)];
    const size = Math.hypot(...a);
    worst = Math.max(worst, Math.hypot(...a.map((value, k) => value - b[k])) / (size > 0 ? size : 1));
  }
  return worst;
}

/** The same function written in each set of leaves, and in a mixture. */
const sameFunctions = [
  ['x^2*y + z', 'r^3*cos(phi)^2*sin(phi) + z', 'x*r*cos(phi)*y + z'],
  ['exp(-(x^2 + y^2))*z^2', 'exp(-r^2)*z^2', 'exp(-r*sqrt(x^2 + y^2))*z^2'],
  ['x/(x^2 + y^2 + 1)', 'r*cos(phi)/(r^2 + 1)', 'x/(r^2 + 1)'],
];

test.each(sameFunctions)('the gradient of %s does not depend on its leaves', (cartesian, cylindrical, mixed) => {
  const { graph, c, build } = setting();
  const reference = gradient(graph, c, build(cartesian));
  // Different but equal expressions: rounding of a dozen operations.
  for (const other of [cylindrical, mixed]) expect(difference(graph, reference, gradient(graph, c, build(other)))).toBeLessThan(1e-13);
});

test('the gradient is that of central differences', () => {
  const { graph, c, build } = setting();
  const f = build('sin(x*z)*exp(-r/3) + r^2*cos(2*phi)*y');
  const grad = gradient(graph, c, f);
  const step = 1e-4;
  for (const point of points) {
    const given = evaluate(graph, grad, point);
    for (let axis = 0; axis < 3; axis++) {
      const at = (shift: number): number => evaluate(graph, [f], point.map((value, k) => (k === axis ? value + shift : value)))[0];
      const numeric = (8 * (at(step) - at(-step)) - (at(2 * step) - at(-2 * step))) / (12 * step);
      // Differences over 1e-4 of values near 10 keep about ten digits.
      expect(Math.abs(given[axis] - numeric)).toBeLessThan(1e-9 * Math.max(1, Math.hypot(...given)));
    }
  }
});

test('curl grad f = 0 and div curl A = 0, in both sets of components', () => {
  const { graph, c, build, vector } = setting();
  const grad = gradient(graph, c, build('sin(x*z)*exp(-r/3) + r^2*cos(2*phi)*y'));
  const potential = vector('y*z*exp(-r)', 'sin(x)*z^2', 'x*y*r');
  const cylindrical = curlCylindrical(graph, c, vector('r*z*sin(phi)', 'r^2*exp(-z^2)*cos(phi)', 'r*log(1 + r)*sin(2*phi)'));
  for (const point of points) {
    const rows = jacobian(graph, c, grad);
    const curl = evaluate(graph, curlCartesian(graph, c, grad), point);
    expect(Math.hypot(...curl)).toBeLessThan(1e-13 * Math.hypot(...evaluate(graph, rows.flat(), point)));
    for (const field of [curlCartesian(graph, c, potential), cylindrical]) {
      const slopes = jacobian(graph, c, field);
      const divergence = evaluate(graph, [graph.add(slopes[0][0], slopes[1][1], slopes[2][2])], point)[0];
      expect(Math.abs(divergence)).toBeLessThan(1e-13 * Math.hypot(...evaluate(graph, slopes.flat(), point)));
    }
  }
});

test('cylindrical and Cartesian components of one potential have one curl', () => {
  const { graph, c, vector } = setting();
  const components = vector('z*r*exp(-r)', 'r*z^2/(1 + r^2)', 'r^2*cos(phi)');
  const left = curlCylindrical(graph, c, components);
  const right = curlCartesian(graph, c, cartesianFromCylindrical(graph, c, components));
  expect(difference(graph, left, right)).toBeLessThan(1e-12);
});

test('the curl of a rotation and of a linear shear are what books say', () => {
  const { graph, c, vector } = setting();
  // ∇×(½ B × r) = B: the symmetric gauge (common practice).
  const uniform = curlCylindrical(graph, c, vector('0', 'r/2', '0'));
  for (const point of points) {
    const given = evaluate(graph, uniform, point);
    [0, 0, 1].forEach((value, axis) => expect(Math.abs(given[axis] - value)).toBeLessThan(1e-14));
    expect(evaluate(graph, curlCartesian(graph, c, vector('0', 'x', '0')), point)).toEqual([0, 0, 1]);
    expect(evaluate(graph, curlCartesian(graph, c, vector('0', '0', 'y - 2*x')), point)).toEqual([1, 2, 0]);
  }
});

test('Euler potentials: B = ∇a × ∇b = ∇×(a ∇b), and B lies in both surfaces', () => {
  const { graph, c, build } = setting();
  const [a, b] = [build('r^2*exp(-z^2)'), build('phi + z*x')];
  const field = eulerField(graph, c, a, b);
  const [bx, by, bz] = gradient(graph, c, b);
  const potential: Vector = [graph.multiply(a, bx), graph.multiply(a, by), graph.multiply(a, bz)];
  expect(difference(graph, field, curlCartesian(graph, c, potential))).toBeLessThan(1e-12);
  for (const point of points) {
    const B = evaluate(graph, field, point);
    for (const surface of [a, b]) {
      const normal = evaluate(graph, gradient(graph, c, surface), point);
      const along = B.reduce((sum, value, k) => sum + value * normal[k], 0);
      expect(Math.abs(along)).toBeLessThan(1e-13 * Math.hypot(...B) * Math.hypot(...normal));
    }
  }
});

test('everything is finite on the axis itself', () => {
  const { graph, c, vector } = setting();
  const field = curlCylindrical(graph, c, vector('0', 'r*exp(-r^2 - z^2)', '0'));
  const [bx, by, bz] = evaluate(graph, field, [0, 0, 0.5]);
  expect([bx, by]).toEqual([0, 0]);
  // B_z = (1/r) ∂(r A_φ)/∂r → 2 e^{-z²} at r = 0; r is held above 1e-12 kpc there.
  expect(Math.abs(bz - 2 * Math.exp(-0.25))).toBeLessThan(1e-12);
});
