import { expect, test } from 'vitest';
import { Graph } from '../../src/formula/graph.ts';
import { compileJavaScript } from '../../src/formula/javascript.ts';
import { lowerGraph } from '../../src/formula/lower.ts';
import { coordinateSubstitution } from '../../src/formula/vector-calculus.ts';
import { buildDensity, buildField, isSolenoidalByConstruction } from '../../src/model/build-model.ts';
import { checkModel } from '../../src/model/check-model.ts';
import { getModel, modelLibrary } from '../../src/model/library.ts';
import type { Model, ModelCheck } from '../../src/model/types.ts';
import { randomStream } from '../../src/math/random.ts';
import { convertQuantity, parseQuantity } from '../../src/units/quantity.ts';

type Point = readonly [number, number, number];
type Evaluate = (points: readonly Point[]) => readonly (readonly number[])[];

const models = [...modelLibrary().values()];
const fields = models.filter((model) => model.kind === 'field');
const densities = models.filter((model) => model.kind === 'density');

/** A model with the parameters of one of its checks, choices overridden. */
function evaluator(model: Model, { parameters }: ModelCheck, choices: Readonly<Record<string, string>> = {}): Evaluate {
  const graph = new Graph();
  const nodes = new Map(model.parameters.map(({ name }) => [name, graph.parameter(name)]));
  const chosen = Object.fromEntries(model.choices.map((choice) => [choice.name, choices[choice.name] ?? String(parameters[choice.name] ?? choice.default)]));
  const use = { model, parameters: nodes, choices: chosen };
  const outputs = model.kind === 'field' ? buildField(graph, use) : [buildDensity(graph, use)];
  const program = lowerGraph(graph, outputs, ['x', 'y', 'z'], coordinateSubstitution(graph));
  const values = Float64Array.from(program.parameters, (name) => {
    const parameter = model.parameters.find((one) => one.name === name);
    const given = parameters[name] ?? parameter?.default ?? NaN;
    const unit = parameter?.unit.replaceAll('deg', 'rad') ?? '';
    if (typeof given === 'string') return parseQuantity(given, unit);
    return parameter?.unit === unit ? given : convertQuantity(given, parameter?.unit ?? '', unit);
  });
  const kernel = compileJavaScript(program);
  return (points) => {
    const lanes = [0, 1, 2].map((axis) => Float64Array.from(points, (point) => point[axis]));
    const out = outputs.map(() => new Float64Array(points.length));
    kernel.evaluate(points.length, values, lanes, out, []);
    return points.map((_, k) => out.map((column) => column[k]));
  };
}

/** Every model with the parameters of each of its checks and all its choices. */
function variants(list: readonly Model[]): [name: string, evaluate: Evaluate, choices: Readonly<Record<string, string>>, model: Model][] {
  return list.flatMap((model) =>
    model.checks.flatMap((check, index) => {
      const combinations = model.choices.reduce<Record<string, string>[]>(
        (sets, choice) => sets.flatMap((set) => Object.keys(choice.options).map((option) => ({ ...set, [choice.name]: option }))),
        [{}],
      );
      return combinations.map((choices): [string, Evaluate, Record<string, string>, Model] => [
        [model.name, `check ${index + 1}`, ...Object.values(choices)].join(', '),
        evaluator(model, check, choices),
        choices,
        model,
      ]);
    }),
  );
}

const stream = randomStream(11, 'models');
const points: Point[] = Array.from({ length: 60 }, () => {
  const [radius, azimuth] = [12 * Math.sqrt(stream.uniform()), 2 * Math.PI * stream.uniform()];
  return [radius * Math.cos(azimuth), radius * Math.sin(azimuth), 6 * (2 * stream.uniform() - 1)];
});

const size = (vector: readonly number[]): number => Math.hypot(...vector);
const distance = (a: readonly number[], b: readonly number[]): number => size(a.map((value, k) => value - b[k]));

test('every model of issue 2 is there', () => {
  expect(fields.map(({ name }) => name)).toEqual(
    expect.arrayContaining(['axisymmetric-spiral', 'spiral-mode', 'dipole-halo', 'quadrupole-halo', 'flared-halo', 'helical-halo', 'toroidal-halo', 'uniform']),
  );
  expect(densities.map(({ name }) => name)).toEqual(expect.arrayContaining(['exponential-disc', 'sech2-disc', 'gaussian-disc', 'slab']));
});

test.each(models.map((model) => [model.name, model] as const))('%s gives its own check values', (_, model) => {
  const checked = checkModel(model);
  expect(checked.length).toBeGreaterThanOrEqual(2);
  // The values have 15 digits (sympy, 30 digits inside); powers and exponentials cost three or four.
  for (const { relativeError, check } of checked) expect(relativeError, JSON.stringify(check)).toBeLessThan(1e-9);
});

test.each(fields.map((model) => [model.name, model] as const))('%s is divergence-free by the way it is given', (_, model) => {
  expect(isSolenoidalByConstruction(model)).toBe(true);
});

test.each(variants(fields))('∇·B = 0 by central differences: %s', (name, evaluate) => {
  const step = 1e-3;
  let [worst, compared] = [0, 0];
  for (const point of points) {
    // ∂B/∂x of fourth order from four shifted points.
    const slopes = [0, 1, 2].map((axis) => {
      const at = [-2, -1, 1, 2].map((shift) => point.map((value, k) => (k === axis ? value + shift * step : value)) as unknown as Point);
      const [a, b, c, d] = evaluate(at);
      return a.map((_, part) => (a[part] - 8 * b[part] + 8 * c[part] - d[part]) / (12 * step));
    });
    const divergence = Math.abs(slopes[0][0] + slopes[1][1] + slopes[2][2]);
    const norm = size(slopes.flat());
    // Where the field is 1e-9 of its strength or uniform, differences hold rounding alone.
    if (norm < 1e-6 * size(evaluate([point])[0]) || norm < 1e-12) continue;
    compared++;
    worst = Math.max(worst, divergence / norm);
  }
  expect(worst).toBeLessThan(1e-6);
  expect(compared).toBeGreaterThan(name.startsWith('uniform') ? -1 : 40);
});

test.each(variants(fields))('bounded and single-valued on the axis and in the plane: %s', (_, evaluate) => {
  const azimuths = Array.from({ length: 7 }, (_, k) => 0.3 + (2 * Math.PI * k) / 7);
  for (const z of [-2.1, -0.3, 0, 0.05, 1.7]) {
    const [axis, beside] = evaluate([[0, 0, z], [0.1, 0, z]]);
    const nearby = Math.max(1, size(axis), size(beside));
    for (const near of [1e-6, 1e-9, 1e-15]) {
      const around = evaluate(azimuths.map((phi): Point => [near * Math.cos(phi), near * Math.sin(phi), z]));
      for (const field of around) {
        expect(field.every(Number.isFinite)).toBe(true);
        // Fields change by less than their size nearby times r over a scale length, and those are above 0.1 kpc.
        expect(distance(field, axis)).toBeLessThan(1e3 * near * nearby + 1e-11 * size(axis));
      }
    }
  }
  for (const [x, y] of points) {
    const [below, plane, above] = evaluate([[x, y, -1e-10], [x, y, 0], [x, y, 1e-10]]);
    expect(plane.every(Number.isFinite)).toBe(true);
    expect(distance(below, above)).toBeLessThan(1e-7 * Math.max(1, size(plane)));
    expect(distance(below, plane)).toBeLessThan(1e-7 * Math.max(1, size(plane)));
  }
});

/** Parity where a model has no choice of it, from its file's text and design/physics.md section 4. */
const parities: Readonly<Record<string, 'even' | 'odd' | undefined>> = { 'axisymmetric-spiral': 'even', 'spiral-mode': 'even', 'quadrupole-halo': 'even', 'dipole-halo': 'odd' };

test.each(variants(fields).filter(([, , , { name }]) => name !== 'uniform'))('parity in z is as declared: %s', (_, evaluate, choices, model) => {
  const parity = choices.parity ?? parities[model.name];
  expect(['even', 'odd']).toContain(parity);
  const sign = parity === 'even' ? 1 : -1;
  const [above, below] = [evaluate(points), evaluate(points.map(([x, y, z]): Point => [x, y, -z]))];
  points.forEach((_, k) => {
    const [bx, by, bz] = below[k];
    expect(distance(above[k], [sign * bx, sign * by, -sign * bz])).toBeLessThan(1e-13 * Math.max(1e-6, size(above[k])));
  });
});

test.each(variants(fields).filter(([, , , { name }]) => !['uniform', 'spiral-mode'].includes(name)))('axisymmetric: %s', (_, evaluate) => {
  const [c, s] = [Math.cos(1.1), Math.sin(1.1)];
  const turned = evaluate(points.map(([x, y, z]): Point => [c * x - s * y, s * x + c * y, z]));
  evaluate(points).forEach(([bx, by, bz], k) => {
    expect(distance(turned[k], [c * bx - s * by, s * bx + c * by, bz])).toBeLessThan(1e-12 * Math.max(1e-6, size(turned[k])));
  });
});

test.each(densities.flatMap((model) => model.checks.map((check, k) => [`${model.name}, check ${k + 1}`, evaluator(model, check)] as const)))('finite, never negative, even in z: %s', (_, evaluate) => {
  const here = evaluate([...points, [0, 0, 0], [0, 0, 1]]);
  const below = evaluate([...points, [0, 0, 0], [0, 0, 1]].map(([x, y, z]): Point => [x, y, -z]));
  here.forEach(([value], k) => {
    expect(Number.isFinite(value) && value >= 0).toBe(true);
    expect(value).toBe(below[k][0]);
  });
});

test('a spiral has its pitch in the plane, and a varying one at its reference', () => {
  const model = getModel('axisymmetric-spiral');
  const pitchAt = (index: number, r: number): number => {
    const [[bx, by]] = evaluator(model, model.checks[index])([[r, 0, 0]]);
    return (Math.atan(bx / by) * 180) / Math.PI;
  };
  expect(Math.abs(pitchAt(0, 5) + 20)).toBeLessThan(1e-12);
  expect(Math.abs(pitchAt(2, 4) + 35)).toBeLessThan(1e-12);
  expect(Math.abs(pitchAt(2, 6) + 30)).toBeLessThan(1e-12);
});

test('a helical line turns once around the axis per turn height', () => {
  // Far above the smoothing layer dφ/dz = B_φ/(r B_z) = 2π/H_turn (design/physics.md section 4.5).
  const model = getModel('helical-halo');
  const [[bx, by, bz]] = evaluator(model, model.checks[0], { parity: 'odd', flux: 'open' })([[3, 0, 40]]);
  expect(Math.abs(by / (3 * bz) - (2 * Math.PI) / 12)).toBeLessThan(1e-12);
  expect(bx).not.toBe(0);
});

test('a flared halo leaves at the opening angle far out and upright on the axis', () => {
  const model = getModel('flared-halo');
  const evaluate = evaluator(model, model.checks[0], { parity: 'odd', flux: 'open' });
  // A line from r_0 is r = r_0 + Z tan θ r_0/(r_0 + turnover), Z → |z| - s: at r_0 = 6, 55 deg, turnover 3 kpc.
  const slope = (Math.tan((55 * Math.PI) / 180) * 6) / 9;
  const z = 30;
  const Z = Math.sqrt(z * z + 0.64) - 0.8;
  const [[bx, , bz]] = evaluate([[6 + Z * slope, 0, z]]);
  // dr/dz = T dZ/dz with dZ/dz = z/√(z² + s²).
  expect(Math.abs(bx / bz - (slope * z) / Math.sqrt(z * z + 0.64))).toBeLessThan(1e-12);
  const [[ax, ay, az]] = evaluate([[0, 0, 7]]);
  expect(Math.hypot(ax, ay)).toBeLessThan(1e-11 * Math.abs(az));
});

test('the dipole has the far field of its strength, the quadrupole its strength at the reference', () => {
  const far = getModel('dipole-halo');
  const [[, , bz]] = evaluator(far, { ...far.checks[0], parameters: { strength: '2 uG', core: '0 kpc', reference: '5 kpc' } })([[50, 0, 0]]);
  expect(Math.abs(bz + 2 / 1000)).toBeLessThan(1e-15);
  const near = getModel('quadrupole-halo');
  const [[bx, by, bzQ]] = evaluator(near, { ...near.checks[0], parameters: { strength: '2 uG', core: '2 kpc', reference: '5 kpc' } })([[5, 0, 0]]);
  expect(Math.abs(bx - 2)).toBeLessThan(1e-13);
  expect([by, bzQ]).toEqual([0, 0]);
});
