import { z } from 'zod';
import { getModel } from '../model/library.ts';
import { fillValues, valuesShape } from '../model/parameters.ts';
import type { Model } from '../model/types.ts';
import { InputError } from '../units/input-error.ts';
import { keys, nameText } from '../units/schema.ts';
import { checkYaml, placeAt } from '../units/yaml-input.ts';
import type { YamlInput, YamlPath } from '../units/yaml-input.ts';
import type { ComponentSources } from './component-sources.ts';
import { readCubeComponent } from './cube-model.ts';
import { readInlineComponent } from './inline-model.ts';
import { readMeanFieldComponent } from './mean-field-model.ts';
import { placed, readHeightLaw } from './section.ts';
import type { Section } from './section.ts';
import { readShape } from './shape.ts';
import { readTabulatedFlare } from './tabulated-flare-model.ts';
import type { CosmicRayLayer } from './types.ts';

/** Models that are no file of the library: what reads each. */
const specialModels: Readonly<Record<string, (input: YamlInput, section: Section, path: YamlPath, sources: ComponentSources) => CosmicRayLayer>> = {
  formula: readInlineComponent,
  'mean-field': readMeanFieldComponent,
  'simulation-cube': readCubeComponent,
  'tabulated-flare-halo': readTabulatedFlare,
};

/** The keys of a component of a library model in a section. */
export function componentSchema(model: Model, section: Section) {
  return keys(
    { model: z.literal(model.name), name: nameText().optional(), ...valuesShape(model, section.rename), ...section.extra },
  );
}

/**
 * The checked components of a section: known models, all parameters in range, names unique. Throws
 * InputError with its place.
 */
export function readComponents(input: YamlInput, section: Section, models: readonly string[], sources: ComponentSources): CosmicRayLayer[] {
  const components = models.map((model, index) => {
    const path = [...section.path, index];
    const read = Object.hasOwn(specialModels, model) ? specialModels[model] : undefined;
    return read ? read(input, section, path, sources) : readLibraryComponent(input, section, path, model);
  });
  components.forEach(({ name }, index) => {
    if (components.findIndex((other) => other.name === name) === index) return;
    throw new InputError(
      `two components of ${section.title} are named "${name}": give one of them another "name"`,
      placeAt(input, [...section.path, index]),
    );
  });
  return components;
}

function readLibraryComponent(input: YamlInput, section: Section, path: YamlPath, modelName: string): CosmicRayLayer {
  const model = placed(input, [...path, 'model'], () => {
    if (modelName === 'turbulence') throw new InputError('turbulence is no component: it is given as turbulence.resolved');
    return getModel(modelName, section.kind);
  });
  const given: Readonly<Record<string, unknown>> = checkYaml(input, componentSchema(model, section), path);
  const values = placed(input, path, () => fillValues(model, given, section.rename));
  const name = typeof given.name === 'string' ? given.name : modelName;
  return { name, model, ...values, ...readHeightLaw(input, path, model, given), ...readShape(input, path, model, given) };
}
