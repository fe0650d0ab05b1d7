import { isScalar } from 'yaml';
import { z } from 'zod';
import { Graph } from '../formula/graph.ts';
import { FormulaError } from '../formula/parse.ts';
import { buildDensity, buildEdges, buildField } from '../model/build-model.ts';
import { findFormulaProblem } from '../model/formula-keys.ts';
import { eulerFormulas, formulasByName, formulaText, reservedNames } from '../model/model-schema.ts';
import type { Model, ModelEdges, ModelFormulas, ModelParameter } from '../model/types.ts';
import { InputError } from '../units/input-error.ts';
import type { Place } from '../units/input-error.ts';
import { canonicalQuantity, parseQuantity } from '../units/quantity.ts';
import { quoteValue } from '../units/quote.ts';
import { keys, listOf, nameText } from '../units/schema.ts';
import { checkYaml, placeAt } from '../units/yaml-input.ts';
import type { YamlInput, YamlPath } from '../units/yaml-input.ts';
import { placed, readHeightLaw } from './section.ts';
import type { Section } from './section.ts';
import { readShape } from './shape.ts';
import type { CosmicRayLayer } from './types.ts';

const parameterName = z.string().regex(/^[A-Za-z][A-Za-z0-9]{0,39}$/, {
  error: ({ input }) => `${quoteValue(input)} is no name: a letter, then letters and digits are wanted, 40 at most`,
});
const parameterValue = z.union([z.string(), z.number()], {
  error: ({ input }) => `${quoteValue(input)} is given where a quantity such as "2 kpc", or a plain number, is wanted`,
});
const edgeList = (what: string) => listOf(formulaText, what, 0, 20).optional();

/** The keys of a component whose formulas stand in the scene. */
export function inlineSchema(section: Section) {
  const formulas = {
    potential: formulasByName.optional(),
    euler: eulerFormulas.optional(),
    field: formulasByName.optional(),
    density: formulaText.optional(),
  };
  return keys(
    {
      model: z.literal('formula'),
      name: nameText().default('formula'),
      parameters: z.record(parameterName, parameterValue).default({}),
      define: formulasByName.default({}),
      ...formulas,
      edges: keys({ z: edgeList('heights'), r: edgeList('radii') }).default({}),
      ...section.extra,
    },
  );
}

/**
 * A component given by formulas in the scene, turned into a model of its own named
 * `formula <name>`. Its parameters are in the units of `canonicalQuantity`. Throws InputError at
 * the place of what is wrong, formulas included.
 */
export function readInlineComponent(input: YamlInput, section: Section, path: YamlPath): CosmicRayLayer {
  const given = checkYaml(input, inlineSchema(section), path);
  const { parameters, values } = readParameters(input, given.parameters, path);
  for (const name of Object.keys(given.define)) checkName(input, name, [...path, 'define', name], Object.keys(values));
  const { potential, euler, field, density } = given;
  const formulas: ModelFormulas = {
    ...(potential && { potential }),
    ...(euler && { euler }),
    ...(field && { field }),
    ...(density !== undefined && { density }),
  };
  const problem = findFormulaProblem(section.kind, formulas);
  if (problem) throw new InputError(problem.reason, placeAt(input, [...path, ...problem.path]));
  const model: Model = {
    name: `formula ${given.name}`,
    kind: section.kind,
    title: `Formula "${given.name}"`,
    meaning: 'Formulas given in the scene.',
    source: 'given in the scene',
    parameters,
    choices: [],
    define: given.define,
    formulas,
    edges: readEdges(input, given.edges, path),
    checks: [],
  };
  tryFormulas(input, model, path);
  return { name: given.name, model, parameters: values, choices: {}, ...readHeightLaw(input, path, model, given), ...readShape(input, path, model, given) };
}

function readParameters(
  input: YamlInput,
  given: Readonly<Record<string, string | number>>,
  path: YamlPath,
): { parameters: ModelParameter[]; values: Record<string, number> } {
  const values: Record<string, number> = {};
  const parameters = Object.entries(given).map(([name, text]) => {
    const place = [...path, 'parameters', name];
    checkName(input, name, place, ['x', 'y', 'z']);
    const { value, unit } = placed(input, place, () => canonicalQuantity(String(text)));
    values[name] = value;
    const range = [-Number.MAX_VALUE, Number.MAX_VALUE] as const;
    return { name, unit, range, meaning: 'given in the scene' };
  });
  return { parameters, values };
}

function checkName(input: YamlInput, name: string, path: YamlPath, taken: readonly string[]): void {
  if (!reservedNames.includes(name) && !taken.includes(name)) return;
  throw new InputError(`the name "${name}" already means something else in formulas`, placeAt(input, path));
}

/** Edges as formulas in kpc, numbers included: "1500 pc" becomes 1.5, anything else is a formula of parameters. */
function readEdges(input: YamlInput, given: ModelEdges, path: YamlPath): ModelEdges {
  const read = (axis: 'z' | 'r'): string[] =>
    (given[axis] ?? []).map((text, index) => {
      const isQuantity = /^\s*[+-]?[\d.]+(e[+-]?\d+)?\s+[A-Za-z]/i.test(text);
      return isQuantity ? String(placed(input, [...path, 'edges', axis, index], () => parseQuantity(text, 'kpc'))) : text;
    });
  return { ...(given.z && { z: read('z') }), ...(given.r && { r: read('r') }) };
}

/** Builds the formulas once, so that what is wrong in them is reported at its place in the file. */
function tryFormulas(input: YamlInput, model: Model, path: YamlPath): void {
  const graph = new Graph();
  const parameters = new Map(model.parameters.map(({ name }) => [name, graph.parameter(name)]));
  const use = { model, parameters, choices: {} };
  try {
    if (model.kind === 'field') buildField(graph, use);
    else buildDensity(graph, use);
    const edges = buildEdges(graph, use);
    for (const axis of ['z', 'r'] as const) {
      const index = edges[axis].findIndex((node) => graph.isVarying(node));
      if (index < 0) continue;
      const reason = `the edge ${quoteValue(model.edges[axis]?.[index])} is no formula of parameters alone`;
      throw new InputError(reason, placeAt(input, [...path, 'edges', axis, index]));
    }
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    throw error.at(error instanceof FormulaError ? placeInFormula(input, pathOfFormula(model, path, error.formula), error) : placeAt(input, path));
  }
}

/** The offending character of a formula where it stands in one line of the text; else the formula's beginning. */
function placeInFormula(input: YamlInput, path: YamlPath, error: FormulaError): Place {
  const place = placeAt(input, path);
  const { document: text } = input;
  const node = text.getIn(path, true);
  const quotes = isScalar(node) ? ({ PLAIN: 0, QUOTE_DOUBLE: 1, QUOTE_SINGLE: 1 } as Readonly<Record<string, number>>)[node.type ?? ''] : undefined;
  const isPlainlyWritten = isScalar(node) && node.range && node.range[1] - node.range[0] === error.formula.length + 2 * (quotes ?? 0);
  if (quotes === undefined || !isPlainlyWritten || place.column === undefined) return place;
  return { ...place, column: place.column + quotes + error.column - 1 };
}

function pathOfFormula(model: Model, path: YamlPath, formula: string): YamlPath {
  const { potential = {}, field = {}, euler, density } = model.formulas;
  const groups: readonly [readonly string[], Readonly<Record<string, string>>][] = [
    [['define'], model.define],
    [['potential'], potential],
    [['field'], field],
    [['euler'], { ...euler }],
    [[], density === undefined ? {} : { density }],
    [['edges', 'z'], Object.fromEntries((model.edges.z ?? []).entries())],
    [['edges', 'r'], Object.fromEntries((model.edges.r ?? []).entries())],
  ];
  for (const [keyPath, formulas] of groups) {
    const key = Object.keys(formulas).find((name) => formulas[name] === formula);
    if (key !== undefined) return [...path, ...keyPath, keyPath[0] === 'edges' ? Number(key) : key];
  }
  return path;
}
