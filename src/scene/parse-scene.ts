import type { GridSource } from '../field/grid-file.ts';
import { InputError, nearestHint } from '../units/input-error.ts';
import { checkVersion, checkYaml, placeAt, readYaml } from '../units/yaml-input.ts';
import type { YamlInput } from '../units/yaml-input.ts';
import { noteSources } from './component-sources.ts';
import { readComponents } from './components.ts';
import { readObservation } from './observation.ts';
import { applyOverrides } from './overrides.ts';
import type { Override } from './overrides.ts';
import { readResolved } from './resolved-turbulence.ts';
import { looseComponent, sceneSchema } from './scene-schema.ts';
import type { SceneFile } from './scene-schema.ts';
import { sections } from './section.ts';
import { checkEquipartition } from './equipartition-index.ts';
import type { Component, CosmicRayLayer, CosmicRays, Galaxy, InputFile, Scene } from './types.ts';

/** The newest version of the scene format, and the only one so far. */
const SCENE_VERSION = 1;

const fileSchema = sceneSchema({ field: looseComponent, density: looseComponent, layer: looseComponent });

/**
 * Scene text (YAML 1.2) → checked scene. `overrides` (from `--set`) change the text's values before
 * they are checked; `files` opens what the scene names. Throws InputError with file:line:column, or the flag, for the first thing wrong.
 */
export function parseScene(text: string, fileName: string, overrides: readonly Override[] = [], files?: GridSource): Scene {
  const input = readYaml(text, fileName);
  checkVersion(input, 'gyrelight', SCENE_VERSION);
  applyOverrides(input, overrides);
  checkVersion(input, 'gyrelight', SCENE_VERSION);
  const file = checkYaml(input, fileSchema);
  const modelsOf = (items: readonly { readonly model: string }[]): string[] => items.map(({ model }) => model);
  const galaxy = readGalaxy(file.galaxy);
  const inputs = new Map<string, InputFile>();
  const sources = noteSources(files, galaxy.volume, inputs);
  const components = {
    field: readComponents(input, sections.field, modelsOf(file.field), sources),
    thermalElectrons: readComponents(input, sections.thermalElectrons, modelsOf(file.thermalElectrons), sources),
    layers: readComponents(input, sections.cosmicRays, modelsOf(file.cosmicRays.layers ?? []), sources),
  };
  const observation = readObservation(input, file.observation, galaxy.distanceKpc);
  const all = Object.values(components).flat();
  return {
    title: file.title,
    galaxy,
    field: components.field,
    thermalElectrons: components.thermalElectrons,
    cosmicRays: readCosmicRays(input, file.cosmicRays, components.layers),
    turbulence: { ...readTurbulence(input, file.turbulence, all), ...readResolved(input, file.turbulence.resolved, all, galaxy, observation) },
    ...(file.freeFree && { freeFree: { temperatureK: file.freeFree.temperature } }),
    ...readGas(input, file, components.thermalElectrons),
    observation,
    numerics: file.numerics,
    ...(inputs.size > 0 && { inputs: [...inputs.values()] }),
  };
}

/** The scene's text with the overrides written into it, for keeping beside results. */
export function sceneText(text: string, fileName: string, overrides: readonly Override[]): string {
  if (overrides.length === 0) return text;
  const input = readYaml(text, fileName);
  applyOverrides(input, overrides);
  return input.document.toString({ lineWidth: 0 });
}

function readGalaxy({ distance, inclination, positionAngle, volume, centre }: SceneFile['galaxy']): Galaxy {
  return {
    distanceKpc: distance,
    inclination,
    positionAngle,
    volume: { radiusKpc: volume.radius, heightKpc: volume.height },
    ...(centre && { centre: { raDeg: centre.ra, decDeg: centre.dec } }),
  };
}

/** Layers or equipartition, and what each of them allows beside it. */
function readCosmicRays(input: YamlInput, { index, layers, equipartition, scaleTo }: SceneFile['cosmicRays'], read: readonly CosmicRayLayer[]): CosmicRays {
  const fail = (reason: string, key: string): never => {
    throw new InputError(`cosmicRays: ${reason}`, placeAt(input, ['cosmicRays', key]));
  };
  if (!equipartition) {
    if (!layers) throw new InputError('cosmicRays: "layers" or "equipartition" is missing: one of them is wanted', placeAt(input, ['cosmicRays']));
    return { index, layers: read, ...(scaleTo && { scaleTo: { fluxJy: scaleTo.flux, atHz: scaleTo.at } }) };
  }
  if (layers) fail('"layers" and "equipartition" are given: one of them is wanted', 'equipartition');
  if (scaleTo) fail('"scaleTo" scales layers; equipartition with the field leaves no factor free', 'scaleTo');
  checkEquipartition(index, (reason) => fail(reason, 'index'));
  return { index, layers: [], equipartition };
}

function readTurbulence(
  input: YamlInput,
  { unresolved, ordered }: SceneFile['turbulence'],
  components: readonly Component[],
): Scene['turbulence'] {
  return {
    ...(unresolved && { unresolved: { rmsUG: unresolved.rms, cellKpc: unresolved.cell, ...readFollows(input, 'unresolved', unresolved.follows, components) } }),
    ...(ordered && {
      ordered: {
        rmsUG: ordered.rms,
        cellKpc: ordered.cell,
        along: ordered.along,
        pitch: readOrderedPitch(input, ordered),
        ...readFollows(input, 'ordered', ordered.follows, components),
      },
    }),
  };
}

/** Dust and Zeeman maps, their gas one component of the thermal electrons or all of them. */
function readGas(input: YamlInput, { dust, zeeman, turbulence }: SceneFile, electrons: readonly Component[]): Pick<Scene, 'dust' | 'zeeman'> {
  const names = electrons.map(({ name }) => name);
  const gas = (key: 'dust' | 'zeeman', follows: string | undefined): { readonly follows?: string } => {
    if (names.length === 0) throw new InputError(`${key} needs gas that follows thermal electrons, and thermalElectrons are empty`, placeAt(input, [key]));
    if (follows === undefined) return {};
    if (names.includes(follows)) return { follows };
    throw new InputError(`${key}.follows: no thermal electrons are named "${follows}"${nearestHint(follows, names)}; there are ${names.join(', ')}`, placeAt(input, [key, 'follows']));
  };
  if (dust && turbulence.ordered) throw new InputError('dust: directions cannot be averaged over turbulence.ordered; leave one of the two out', placeAt(input, ['dust']));
  return {
    ...(dust && { dust: { ...gas('dust', dust.follows), polarization: dust.polarization, hydrogenRatio: dust.hydrogenRatio, temperatureK: dust.temperature, opacityCm2: dust.opacity, frequencyHz: dust.at } }),
    ...(zeeman && { zeeman: gas('zeeman', zeeman.follows) }),
  };
}

/** The pitch of the ordered field: wanted along a pitch, and only there. */
function readOrderedPitch(input: YamlInput, { along, pitch }: { readonly along: 'azimuth' | 'pitch'; readonly pitch?: number | undefined }): number {
  const fail = (reason: string): never => {
    throw new InputError(`turbulence.ordered: ${reason}`, placeAt(input, ['turbulence', 'ordered', pitch === undefined ? 'along' : 'pitch']));
  };
  if (along === 'pitch') return pitch ?? fail('"along: pitch" needs the angle "pitch", such as "-20 deg"');
  return pitch === undefined ? 0 : fail('"pitch" is given, but the field lies along the azimuth; say "along: pitch"');
}

/** `follows` names one component, and one whose amplitude is known so that it can be divided out. */
function readFollows(input: YamlInput, key: 'unresolved' | 'ordered', follows: string | undefined, components: readonly Component[]): { readonly follows?: string } {
  if (follows === undefined) return {};
  const fail = (reason: string): never => {
    throw new InputError(`turbulence.${key}.follows: ${reason}`, placeAt(input, ['turbulence', key, 'follows']));
  };
  const names = components.map(({ name }) => name);
  const found = components.filter(({ name }) => name === follows);
  if (found.length === 0) fail(`nothing is named "${follows}"${nearestHint(follows, names)}; there are ${names.join(', ')}`);
  if (found.length > 1) fail(`"${follows}" fits ${found.length} components: give them different names`);
  const amplitude = ['strength', 'density'].find((name) => Object.hasOwn(found[0].parameters, name));
  if (amplitude === undefined) fail(`"${follows}" has neither "strength" nor "density" to divide by`);
  else if (found[0].parameters[amplitude] === 0) fail(`the ${amplitude} of "${follows}" is 0 and cannot be divided by`);
  return { follows };
}
