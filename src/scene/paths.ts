import { internalUnit, parameterLimits } from '../model/parameters.ts';
import { InputError, nearestHint } from '../units/input-error.ts';
import type { Limits } from '../units/limits.ts';
import { findLimitProblem } from '../units/limits.ts';
import { convertQuantity, formatQuantity, parseQuantity } from '../units/quantity.ts';
import { quoteValue } from '../units/quote.ts';
import { fixedPaths } from './fixed-paths.ts';
import type { PathEntry } from './fixed-paths.ts';
import { sceneLimits } from './limits.ts';
import { sections } from './section.ts';
import type { Section } from './section.ts';
import { shapeEntries } from './shape.ts';
import type { Component, CosmicRayLayer, Scene } from './types.ts';

/** One number of a scene, addressed by a path such as `field.halo.strength`. */
export interface ScenePath {
  readonly path: string;
  /** Unit of `get`, `set` and `range`: angles rad, frequencies Hz, else as files have it. */
  readonly unit: string;
  /** Unit in files and on screen, such as deg. */
  readonly shownUnit: string;
  /** Allowed values, inclusive, in `unit`. */
  readonly range: readonly [number, number];
  readonly whole: boolean;
  readonly meaning: string;
  get(): number;
  /** A copy of `scene` with the number changed. Throws InputError where it is not allowed. */
  set(scene: Scene, value: number): Scene;
}

/**
 * The number at a path: `galaxy.inclination`, `field.<name>.<parameter>`,
 * `thermalElectrons.<name>.<parameter>`, `cosmicRays.<name>.<parameter>` (C as `normalisation`),
 * `cosmicRays.index`, `turbulence.unresolved.rms`, `observation.beam.major` and so on; all are in
 * `scenePaths`. Throws InputError, without a place, with the nearest path.
 */
export function scenePath(scene: Scene, path: string): ScenePath {
  const all = entriesOf(scene);
  const found = all.filter((entry) => entry.path === path);
  if (found.length > 1) throw new InputError(`the path "${path}" fits ${found.length} values: give the components different names`);
  if (found.length === 0) throw unknownPath(path, all.map((entry) => entry.path));
  const [{ limits, internalUnit: unit, meaning, read, write }] = found;
  return {
    path,
    unit,
    shownUnit: limits.unit,
    range: [convertQuantity(limits.min, limits.unit, unit), convertQuantity(limits.max, limits.unit, unit)],
    whole: limits.whole ?? false,
    meaning,
    get: () => present(read(scene), path),
    set: (target, value) => {
      present(read(target), path);
      const inUnit = { ...limits, min: convertQuantity(limits.min, limits.unit, unit), max: convertQuantity(limits.max, limits.unit, unit) };
      if (findLimitProblem(value, inUnit, '') !== undefined) throw new InputError(`${path}: ${limitText(value, unit, limits)}`);
      return write(target, value);
    },
  };
}

/** Every path of a scene that `scenePath` knows. */
export function scenePaths(scene: Scene): readonly string[] {
  return entriesOf(scene).map((entry) => entry.path);
}

/** Every number of a scene by its path, in the paths' `unit`. */
export function sceneNumbers(scene: Scene): ReadonlyMap<string, number> {
  return new Map(entriesOf(scene).flatMap(({ path, read }) => {
    const value = read(scene);
    return value === undefined ? [] : [[path, value] as const];
  }));
}

/**
 * A value written for a path, "3 uG" (or a plain number where there is no unit), in the path's
 * `unit` and checked against its range. Throws InputError without a place.
 */
export function parsePathValue(target: ScenePath, scene: Scene, given: string | number): number {
  if (typeof given === 'number' && target.unit !== '') parseQuantity(String(given), target.shownUnit);
  const value = typeof given === 'number' ? given : parseQuantity(given, target.unit);
  target.set(scene, value);
  return value;
}

function limitText(value: number, unit: string, limits: Limits): string {
  const shown = convertQuantity(value, unit, limits.unit);
  const given = formatQuantity(value, unit, limits.unit);
  // A value one rounding beyond the end shows as inside once it is converted.
  return findLimitProblem(shown, limits, given) ?? `${given} is just outside the allowed range`;
}

function unknownPath(path: string, all: readonly string[]): InputError {
  const section = all.filter((known) => known.startsWith(`${path.split('.')[0]}.`));
  const listed = section.length > 0 ? section : all;
  return new InputError(`unknown path ${quoteValue(path)}${nearestHint(path.slice(0, 200), all)}; known are ${listed.join(', ')}`);
}

function present(value: number | undefined, path: string): number {
  if (value === undefined) throw new InputError(`the scene has no "${path}"`);
  return value;
}

function entriesOf(scene: Scene): PathEntry[] {
  return [
    ...fixedPaths.filter((entry) => entry.read(scene) !== undefined),
    ...lists.flatMap((list) => list.read(scene).flatMap((component) => entriesOfComponent(list, component))),
  ];
}

/** One of the lists of components, read and replaced. */
interface ComponentList {
  readonly section: Section;
  read(scene: Scene): readonly CosmicRayLayer[];
  write(scene: Scene, components: readonly CosmicRayLayer[]): Scene;
}

const lists: readonly ComponentList[] = [
  { section: sections.field, read: ({ field }) => field, write: (scene, field) => ({ ...scene, field }) },
  {
    section: sections.thermalElectrons,
    read: ({ thermalElectrons }) => thermalElectrons,
    write: (scene, thermalElectrons) => ({ ...scene, thermalElectrons }),
  },
  {
    section: sections.cosmicRays,
    read: ({ cosmicRays }) => cosmicRays.layers,
    write: (scene, layers) => ({ ...scene, cosmicRays: { ...scene.cosmicRays, layers } }),
  },
];

/** The paths of a component: parameters of its model, and a layer's height law. */
function entriesOfComponent({ section, read, write }: ComponentList, component: CosmicRayLayer): PathEntry[] {
  const find = (scene: Scene): CosmicRayLayer | undefined => read(scene).find(({ name }) => name === component.name);
  const change = (scene: Scene, edit: (old: CosmicRayLayer) => CosmicRayLayer): Scene =>
    write(scene, read(scene).map((old) => (old.name === component.name ? edit(old) : old)));
  const path = (key: string): string => `${section.title}.${component.name}.${key}`;
  const parameters = component.model.parameters.map((parameter): PathEntry => ({
    path: path(section.rename[parameter.name] ?? parameter.name),
    limits: parameterLimits(parameter),
    internalUnit: internalUnit(parameter),
    meaning: parameter.meaning,
    read: (scene) => find(scene)?.parameters[parameter.name],
    write: (scene, value) => change(scene, (old) => withParameter(old, parameter.name, value)),
  }));
  for (const { key, read: readShape, write: writeShape, ...limit } of shapeEntries) {
    if (readShape(component) === undefined) continue;
    parameters.push({
      path: path(key),
      ...limit,
      read: (scene) => readShape(find(scene) ?? {}),
      write: (scene, value) => change(scene, (old) => ({ ...old, ...writeShape(old, value) })),
    });
  }
  if (component.heightIndex === undefined) return parameters;
  return [
    ...parameters,
    {
      path: path('heightIndex'),
      ...sceneLimits.heightIndex,
      read: (scene) => find(scene)?.heightIndex,
      write: (scene, heightIndex) => change(scene, (old) => ({ ...old, heightIndex })),
    },
    {
      path: path('heightAt'),
      ...sceneLimits.heightAt,
      read: (scene) => find(scene)?.heightAtHz,
      write: (scene, heightAtHz) => change(scene, (old) => ({ ...old, heightAtHz })),
    },
  ];
}

function withParameter<T extends Component>(component: T, name: string, value: number): T {
  return { ...component, parameters: { ...component.parameters, [name]: value } };
}
