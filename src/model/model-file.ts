import { InputError } from '../units/input-error.ts';
import { describeLimits, findLimitProblem } from '../units/limits.ts';
import { formatQuantity } from '../units/quantity.ts';
import { keys } from '../units/schema.ts';
import { parseUnit } from '../units/unit.ts';
import { checkYaml, placeAt, plainValue, readYaml } from '../units/yaml-input.ts';
import type { YamlInput, YamlPath } from '../units/yaml-input.ts';
import { findFormulaProblem } from './formula-keys.ts';
import { modelSchema, reservedNames } from './model-schema.ts';
import { fillValues, parameterLimits, valuesShape } from './parameters.ts';
import type { Model, ModelChoice, ModelParameter } from './types.ts';

/**
 * Reads and checks a model file (format: `models/README.md`). Formula text is carried, not read.
 * Throws InputError with file:line:column for the first thing that is wrong.
 */
export function parseModelFile(text: string, fileName: string): Model {
  const input = readYaml(text, fileName);
  const whole = plainValue(input);
  const asList = typeof whole === 'object' && whole !== null && 'parameters' in whole && Array.isArray(whole.parameters);
  const { potential, armPotential, euler, field, density, choices, ...rest } = checkYaml(input, modelSchema(asList));
  const model: Model = {
    ...rest,
    choices: Object.entries(choices).map(([name, choice]) => ({ name, ...choice })),
    formulas: {
      ...(potential && { potential }),
      ...(armPotential && { armPotential }),
      ...(euler && { euler }),
      ...(field && { field }),
      ...(density !== undefined && { density }),
    },
  };
  const base = /([^/\\]+)\.yaml$/.exec(fileName)?.[1];
  if (base !== undefined && base !== model.name) {
    fail(input, ['name'], `the model "${model.name}" must be in a file of its name, not ${base}.yaml`);
  }
  const pathOf = (name: string): YamlPath => ['parameters', asList ? model.parameters.findIndex((one) => one.name === name) : name];
  checkNames(input, model, pathOf);
  for (const parameter of model.parameters) checkParameter(input, parameter, pathOf(parameter.name));
  for (const choice of model.choices) checkChoice(input, choice);
  const problem = findFormulaProblem(model.kind, model.formulas);
  if (problem) fail(input, problem.path, problem.reason);
  checkChecks(input, model);
  return model;
}

function fail(input: YamlInput, path: YamlPath, reason: string): never {
  throw new InputError(reason, placeAt(input, path));
}

/** Every name of a model means one thing. */
function checkNames(input: YamlInput, model: Model, pathOf: (parameter: string) => YamlPath): void {
  const taken = new Map<string, string>(reservedNames.map((name) => [name, 'a word of formulas or scenes']));
  const take = (name: string, what: string, path: YamlPath): void => {
    const other = taken.get(name);
    if (other) fail(input, path, `the name "${name}" of ${what} is already that of ${other}`);
    taken.set(name, what);
  };
  for (const { name } of model.parameters) take(name, 'a parameter', pathOf(name));
  for (const { name } of model.choices) take(name, 'a choice', ['choices', name]);
  const options = new Map<string, number>();
  for (const choice of model.choices) {
    for (const [option, value] of Object.entries(choice.options)) {
      const path = ['choices', choice.name, 'options', option];
      // Two choices may share a word (yes, no) where it stands for one number.
      if (options.get(option) !== value) take(option, 'an option', path);
      options.set(option, value);
    }
  }
  for (const name of Object.keys(model.define)) take(name, 'a definition', ['define', name]);
}

function checkParameter(input: YamlInput, parameter: ModelParameter, path: YamlPath): void {
  const { name, unit, range } = parameter;
  try {
    parseUnit(unit);
  } catch (error) {
    throw error instanceof InputError ? error.at(placeAt(input, [...path, 'unit'])) : error;
  }
  if (!(range[0] < range[1])) {
    fail(input, [...path, 'range'], `parameter "${name}" has the range ${range[0]} to ${range[1]}, which is empty`);
  }
  if (parameter.group !== undefined && parameter.default === undefined) {
    fail(input, path, `parameter "${name}" is of the group "${parameter.group}" and so may be left out, but has no default`);
  }
  if (parameter.default === undefined) return;
  const limits = parameterLimits(parameter);
  const given = formatQuantity(parameter.default, unit);
  if (findLimitProblem(parameter.default, limits, given)) {
    fail(input, [...path, 'default'], `parameter "${name}" has default ${given}, outside its range ${describeLimits(limits)}`);
  }
}

function checkChoice(input: YamlInput, choice: ModelChoice): void {
  const options = Object.keys(choice.options);
  const path = ['choices', choice.name];
  if (options.length < 2) fail(input, [...path, 'options'], `choice "${choice.name}" has ${options.length} options; at least 2 are wanted`);
  if (choice.default !== undefined && !options.includes(choice.default)) {
    fail(input, [...path, 'default'], `choice "${choice.name}" has default "${choice.default}", which is none of ${options.join(', ')}`);
  }
}

/** Checks give all parameters, in range, and the value that the model's kind has. */
function checkChecks(input: YamlInput, model: Model): void {
  const schema = keys(valuesShape(model));
  const other = model.kind === 'field' ? 'density' : 'field';
  model.checks.forEach((check, index) => {
    const path = ['checks', index] as const;
    if (check[model.kind] === undefined) fail(input, path, `a check of a ${model.kind} model needs "${model.kind}"`);
    if (check[other] !== undefined) fail(input, [...path, other], `a ${model.kind} model has no ${other} to check`);
    const given = checkYaml(input, schema, [...path, 'parameters']);
    try {
      fillValues(model, given);
    } catch (error) {
      throw error instanceof InputError ? error.at(placeAt(input, [...path, 'parameters'])) : error;
    }
  });
}
