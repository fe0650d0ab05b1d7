import { expect, test } from 'vitest';
import { Graph } from '../../src/formula/graph.ts';
import { compileJavaScript } from '../../src/formula/javascript.ts';
import { lowerGraph } from '../../src/formula/lower.ts';
import { coordinateSubstitution } from '../../src/formula/vector-calculus.ts';
import { compileWasm } from '../../src/formula/wasm/kernel.ts';
import { buildDensity, buildField } from '../../src/model/build-model.ts';
import { modelLibrary } from '../../src/model/library.ts';
import type { Model } from '../../src/model/types.ts';
import { makeRandom } from './wasm-random.ts';

const models = [...modelLibrary().values()];
const choicesOf = (model: Model): Record<string, string>[] =>
  model.choices.reduce<Record<string, string>[]>((all, choice) => all.flatMap((made) => Object.keys(choice.options).map((option) => ({ ...made, [choice.name]: option }))), [{}]);
const cases = models.flatMap((model) => choicesOf(model).map((choices) => [model.name, Object.values(choices).join(' '), model, choices] as const));

test.each(cases)('%s (%s) is the same field in both back ends', (_name, _options, model, choices) => {
  const graph = new Graph();
  const parameters = new Map(model.parameters.map(({ name }) => [name, graph.parameter(name)]));
  const use = { model, parameters, choices };
  const nodes = model.kind === 'field' ? buildField(graph, use) : [buildDensity(graph, use)];
  const program = lowerGraph(graph, nodes, ['x', 'y', 'z'], coordinateSubstitution(graph));
  const random = makeRandom(3);
  // Angles stay below half a radian, all else between 0.5 and 2.
  const values = Float64Array.from(program.parameters, (name) => {
    const parameter = model.parameters.find((one) => one.name === name);
    if (parameter?.whole) return 1 + Math.floor(3 * random());
    return parameter?.unit.startsWith('deg') ? 0.1 + 0.4 * random() : 0.5 + 1.5 * random();
  });
  const count = 500;
  const lanes = [12, 12, 5].map((size) => Float64Array.from({ length: count }, () => (2 * random() - 1) * size));
  const outputs = (): Float64Array[] => nodes.map(() => new Float64Array(count));
  const [wasm, javascript] = [outputs(), outputs()];
  compileWasm(program).evaluate(count, values, lanes, wasm, []);
  compileJavaScript(program).evaluate(count, values, lanes, javascript, []);
  let worst = 0;
  for (let k = 0; k < count; k++) {
    const size = Math.hypot(...javascript.map((part) => part[k]));
    const difference = Math.hypot(...javascript.map((part, axis) => part[k] - wasm[axis][k]));
    expect(Number.isFinite(size)).toBe(true);
    worst = Math.max(worst, difference === 0 ? 0 : difference / Math.max(size, 1e-300));
  }
  // issue: 1e-12 relative to the field's size, derivatives' cancellations included.
  expect(worst).toBeLessThan(1e-12);
});
