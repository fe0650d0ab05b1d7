import type { z } from 'zod';
import { InputError } from '../units/input-error.ts';
import type { Limits } from '../units/limits.ts';
import { convertQuantity } from '../units/quantity.ts';
import { oneOf, quantity } from '../units/schema.ts';
import { radianUnitText } from '../units/unit.ts';
import type { Model, ModelParameter } from './types.ts';

/** A model's parameters as formulas see them (declared unit, angles in rad), and its choices. */
export interface ModelValues {
  readonly parameters: Readonly<Record<string, number>>;
  readonly choices: Readonly<Record<string, string>>;
}

/** The unit in which formulas see a parameter: as declared, but angles in radians. */
export function internalUnit(parameter: ModelParameter): string {
  return radianUnitText(parameter.unit);
}

/** The values a parameter may take, in its declared unit. */
export function parameterLimits({ unit, range, whole, nonZero }: ModelParameter): Limits {
  return { unit, min: range[0], max: range[1], whole, nonZero };
}

/**
 * What a user may write for a model: one entry per parameter and choice, optional where the model
 * has a default. `rename` gives keys other than the parameters' own names.
 */
export function valuesShape(model: Model, rename: Readonly<Record<string, string>> = {}): Record<string, z.ZodType> {
  const shape: Record<string, z.ZodType> = {};
  for (const parameter of model.parameters) {
    const schema = quantity(parameterLimits(parameter), internalUnit(parameter), parameter.meaning);
    shape[rename[parameter.name] ?? parameter.name] = parameter.default === undefined ? schema : schema.optional();
  }
  for (const choice of model.choices) {
    const schema = oneOf(Object.keys(choice.options), choice.name).meta({ description: choice.meaning });
    shape[choice.name] = choice.default === undefined ? schema : schema.optional();
  }
  return shape;
}

/**
 * Values that `valuesShape` has checked, with defaults filled in. Throws InputError, without a
 * place, where only part of a group is given.
 */
export function fillValues(
  model: Model,
  given: Readonly<Record<string, unknown>>,
  rename: Readonly<Record<string, string>> = {},
): ModelValues {
  const parameters: Record<string, number> = {};
  const choices: Record<string, string> = {};
  const keyOf = (parameter: ModelParameter): string => rename[parameter.name] ?? parameter.name;
  for (const parameter of model.parameters) {
    const value = given[keyOf(parameter)] ?? defaultValue(parameter);
    if (typeof value === 'number') parameters[parameter.name] = value;
  }
  for (const choice of model.choices) {
    const value = given[choice.name] ?? choice.default;
    if (typeof value === 'string') choices[choice.name] = value;
  }
  for (const group of new Set(model.parameters.map((parameter) => parameter.group))) {
    if (group === undefined) continue;
    const members = model.parameters.filter((parameter) => parameter.group === group).map(keyOf);
    const missing = members.filter((key) => given[key] === undefined);
    if (missing.length > 0 && missing.length < members.length) {
      const present = members.filter((key) => !missing.includes(key));
      throw new InputError(`"${present[0]}" is given without "${missing[0]}": ${members.join(', ')} (${group}) go together or not at all`);
    }
  }
  return { parameters, choices };
}

function defaultValue(parameter: ModelParameter): number | undefined {
  return parameter.default === undefined
    ? undefined
    : convertQuantity(parameter.default, parameter.unit, internalUnit(parameter));
}
