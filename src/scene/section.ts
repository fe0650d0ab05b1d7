import type { z } from 'zod';
import type { Model, ModelKind } from '../model/types.ts';
import { InputError } from '../units/input-error.ts';
import { placeAt } from '../units/yaml-input.ts';
import type { YamlInput, YamlPath } from '../units/yaml-input.ts';
import { limited, sceneLimits } from './limits.ts';
import { fillingKey, shapeKeys } from './shape.ts';
import type { CosmicRayLayer } from './types.ts';

/** A list of components in a scene: where it is, the kind of its models, keys beside the models' own. */
export interface Section {
  readonly title: string;
  readonly path: YamlPath;
  readonly kind: ModelKind;
  /** Parameter of a model → its key in this section. */
  readonly rename: Readonly<Record<string, string>>;
  readonly extra: z.ZodRawShape;
}

const layerKeys = {
  heightIndex: limited(sceneLimits.heightIndex).optional(),
  heightAt: limited(sceneLimits.heightAt).optional(),
};

/** The three lists of components of a scene. */
export const sections = {
  field: { title: 'field', path: ['field'], kind: 'field', rename: {}, extra: shapeKeys },
  thermalElectrons: {
    title: 'thermalElectrons',
    path: ['thermalElectrons'],
    kind: 'density',
    rename: {},
    extra: { ...shapeKeys, ...fillingKey },
  },
  cosmicRays: {
    title: 'cosmicRays',
    path: ['cosmicRays', 'layers'],
    kind: 'density',
    rename: { density: 'normalisation' },
    extra: { ...shapeKeys, ...layerKeys },
  },
} as const satisfies Readonly<Record<string, Section>>;

/**
 * The frequency dependence of a layer's height: both keys or neither, and only where the model has
 * a `height`. Throws InputError with its place.
 */
export function readHeightLaw(
  input: YamlInput,
  path: YamlPath,
  model: Model,
  { heightIndex, heightAt }: Readonly<Record<string, unknown>>,
): Pick<CosmicRayLayer, 'heightIndex' | 'heightAtHz'> {
  if (heightIndex === undefined && heightAt === undefined) return {};
  const [present, missing] = heightIndex === undefined ? ['heightAt', 'heightIndex'] : ['heightIndex', 'heightAt'];
  if (typeof heightIndex !== 'number' || typeof heightAt !== 'number') {
    throw new InputError(`"${present}" is given without "${missing}": both or neither`, placeAt(input, path, present));
  }
  if (!model.parameters.some(({ name }) => name === 'height')) {
    throw new InputError(`"${present}" needs a model with the parameter "height"; "${model.name}" has none`, placeAt(input, path, present));
  }
  return { heightIndex, heightAtHz: heightAt };
}

/** Runs `compute`; an InputError without a place gets that of the value at `path`. */
export function placed<T>(input: YamlInput, path: YamlPath, compute: () => T): T {
  try {
    return compute();
  } catch (error) {
    throw error instanceof InputError ? error.at(placeAt(input, path)) : error;
  }
}
