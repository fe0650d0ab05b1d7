import { expect, test } from 'vitest';
import { differentiate } from '../../src/formula/differentiate.ts';
import { Graph, type NodeId } from '../../src/formula/graph.ts';
import { compileJavaScript, interpretProgram } from '../../src/formula/javascript.ts';
import { lowerGraph } from '../../src/formula/lower.ts';
import { coordinatesOf, coordinateSubstitution, curlCartesian, curlCylindrical, jacobian, type Vector } from '../../src/formula/vector-calculus.ts';
import { compileWasm } from '../../src/formula/wasm/kernel.ts';
import { randomStream } from '../../src/math/random.ts';
import { interpolateGrid, type SplineGrid } from '../../src/math/spline-grid.ts';
import type { AxisEnds } from '../../src/math/spline-line.ts';

const stream = randomStream(11, 'grids');
function randomGrid(name: string, shape: readonly number[], ends: AxisEnds): SplineGrid {
  const values = Float64Array.from({ length: shape.reduce((a, b) => a * b) }, () => stream.gaussian());
  return interpolateGrid(name, values, shape, shape.map(() => ends));
}

function points(count: number, reach: number): Float64Array[] {
  return [0, 1, 2].map(() => Float64Array.from({ length: count }, () => (2 * stream.uniform() - 1) * reach));
}

/** Field, its divergence and the norm of its gradient. */
function withDivergence(graph: Graph, field: Vector): NodeId[] {
  const rows = jacobian(graph, coordinatesOf(graph), field);
  const squares = rows.flatMap((row) => row.map((entry) => graph.power(entry, 2)));
  return [...field, graph.add(rows[0][0], rows[1][1], rows[2][2]), graph.power(graph.add(...squares), 0.5)];
}

/** curl of three grids over Cartesian coordinates: cells of 0.4 kpc, the middle of the box at 0. */
function cubeCase(ends: AxisEnds): { graph: Graph; outputs: NodeId[]; grids: SplineGrid[] } {
  const graph = new Graph();
  const c = coordinatesOf(graph);
  const place = (leaf: NodeId): NodeId => graph.add(graph.multiply(leaf, graph.parameter('perCell')), graph.constant(4.3));
  const potential = ['ax', 'ay', 'az'].map((name) => graph.grid(name, [0, 0, 0], [c.x, c.y, c.z].map(place))) as unknown as Vector;
  const grids = ['ax', 'ay', 'az'].map((name) => randomGrid(name, [8, 9, 10], ends));
  return { graph, outputs: withDivergence(graph, curlCartesian(graph, c, potential)), grids };
}

/** A_phi = r g(r, z) and B_phi = r b(r, z) with even g and b: regular on the axis. */
function meridianCase(): { graph: Graph; outputs: NodeId[]; grids: SplineGrid[] } {
  const graph = new Graph();
  const c = coordinatesOf(graph);
  const at = [graph.divide(c.r, graph.constant(0.3)), graph.add(graph.divide(c.z, graph.constant(0.25)), graph.constant(8))];
  const zero = graph.constant(0);
  const [g, b] = ['g', 'b'].map((name) => graph.multiply(c.r, graph.grid(name, [0, 0], at)));
  const poloidal = curlCylindrical(graph, c, [zero, g, zero]);
  const [sine, cosine] = [graph.divide(c.y, c.r), graph.divide(c.x, c.r)];
  const field: Vector = [graph.subtract(poloidal[0], graph.multiply(b, sine)), graph.add(poloidal[1], graph.multiply(b, cosine)), poloidal[2]];
  const grids = ['g', 'b'].map((name) => interpolateGrid(name, Float64Array.from({ length: 15 * 17 }, () => stream.gaussian()), [15, 17], ['even', 'free']));
  return { graph, outputs: withDivergence(graph, field), grids };
}

const cases = { periodic: () => cubeCase('periodic'), free: () => cubeCase('free'), meridian: meridianCase };

test.each(Object.keys(cases) as (keyof typeof cases)[])('%s grids: the curl is free of divergence, and both back ends agree', (name) => {
  const { graph, outputs, grids } = cases[name]();
  const program = lowerGraph(graph, outputs, ['x', 'y', 'z'], coordinateSubstitution(graph));
  const ordered = program.grids.map((wanted) => grids.find(({ key }) => key === wanted) as SplineGrid);
  const parameters = Float64Array.from(program.parameters, () => 2.5);
  const count = 301;
  // Beyond the box periodic grids go on; others are asked within.
  const lanes = points(count, name === 'periodic' ? 6 : 1.3);
  lanes[0][0] = lanes[1][0] = 0;
  const [javascript, wasm] = [0, 1].map(() => outputs.map(() => new Float64Array(count)));
  compileJavaScript(program).evaluate(count, parameters, lanes, javascript, [], ordered);
  const kernel = compileWasm(program);
  kernel.evaluate(count, parameters, lanes, wasm, [], ordered);
  const size = Math.max(...javascript[4]);
  for (let k = 0; k < count; k++) {
    // Rounding: nine second derivatives of 64 coefficients of order 1 over cells of 0.4 kpc or less.
    expect(Math.abs(javascript[3][k])).toBeLessThan(1e-13 * size);
    outputs.forEach((_, part) => expect(Math.abs(wasm[part][k] - javascript[part][k])).toBeLessThan(1e-13 * size));
  }
  const [single] = interpretProgram(program, parameters, lanes.map((lane) => lane[5]), [], ordered);
  expect(single).toBe(javascript[0][5]);
});

test('derivatives by the graph are those of finite differences, to the third order along one axis and 0 beyond', () => {
  const graph = new Graph();
  const [x, y, z] = ['x', 'y', 'z'].map((name) => graph.variable(name));
  const grid = randomGrid('f', [7, 7, 7], 'free');
  // Coordinates that depend on several leaves try the chain rule.
  const f = graph.grid('f', [0, 0, 0], [graph.add(x, graph.constant(3)), graph.add(graph.multiply(x, y), graph.constant(3)), graph.add(z, graph.constant(3))]);
  const orders = [f, differentiate(graph, f, x), differentiate(graph, differentiate(graph, f, x), y), differentiate(graph, f, z)];
  let more = orders[3];
  for (let k = 0; k < 3; k++) more = differentiate(graph, more, z);
  expect(graph.findConstant(more)).toBe(0);
  const program = lowerGraph(graph, orders, ['x', 'y', 'z']);
  const at = (...point: number[]): number[] => interpretProgram(program, new Float64Array(0), point, [], [grid]);
  const h = 1e-5;
  for (let k = 0; k < 50; k++) {
    const [px, py, pz] = [0, 1, 2].map(() => (2 * stream.uniform() - 1) * 1.4);
    const values = at(px, py, pz);
    const slopes = [(at(px + h, py, pz)[0] - at(px - h, py, pz)[0]) / (2 * h), (at(px, py + h, pz)[1] - at(px, py - h, pz)[1]) / (2 * h), (at(px, py, pz + h)[0] - at(px, py, pz - h)[0]) / (2 * h)];
    // A kink of the third derivative between the two points costs up to h times its jump, about 30.
    slopes.forEach((slope, index) => expect(Math.abs(slope - values[index + 1])).toBeLessThan(1e-3));
  }
});

test('a module reads the grids it is given now, not those of before', () => {
  const graph = new Graph();
  const c = coordinatesOf(graph);
  const program = lowerGraph(graph, ['a', 'b'].map((name) => graph.grid(name, [0, 0], [c.x, c.y])), ['x', 'y', 'z']);
  const kernel = compileWasm(program);
  const constant = (key: string, value: number, side: number): SplineGrid => interpolateGrid(key, new Float64Array(side * side).fill(value), [side, side], ['free', 'free']);
  const read = (...grids: SplineGrid[]): number[] => {
    const out = [new Float64Array(1), new Float64Array(1)];
    kernel.evaluate(1, new Float64Array(0), [Float64Array.of(1), Float64Array.of(1), Float64Array.of(1)], out, [], grids);
    return out.map((values) => Math.round(values[0] * 1e9) / 1e9);
  };
  const [one, two, wide] = [constant('one', 1, 5), constant('two', 2, 5), constant('wide', 3, 300)];
  expect(read(one, two)).toEqual([1, 2]);
  expect(read(wide, two)).toEqual([3, 2]);
  expect(read(one, two)).toEqual([1, 2]);
  expect(read(two, one)).toEqual([2, 1]);
});
