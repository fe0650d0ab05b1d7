import { z } from 'zod';
import { meanFieldOf, type MeanField } from '../field/mean-field.ts';
import { interpolateGrid } from '../math/spline-grid.ts';
import type { Model } from '../model/types.ts';
import { InputError } from '../units/input-error.ts';
import { keys, nameText, quantity, words } from '../units/schema.ts';
import { checkYaml, placeAt, type YamlInput, type YamlPath } from '../units/yaml-input.ts';
import type { ComponentSources } from './component-sources.ts';
import { placed, type Section } from './section.ts';
import { readShape } from './shape.ts';
import type { CosmicRayLayer, GriddedFunction } from './types.ts';

const strength = { unit: 'uG', min: -1e4, max: 1e4 };

/** The keys of a component whose field was solved for. */
export function meanFieldSchema(section: Section) {
  return keys(
    {
      model: z.literal('mean-field'),
      name: nameText().default('mean-field'),
      file: words('the name of a file of "gyrelight dynamo"'),
      strength: quantity(strength, 'uG', 'largest |B_phi|; as solved where left out').optional(),
      ...section.extra,
    },
  );
}

/**
 * An axisymmetric field solved by the dynamo (physics.md section 4, item 7): cubic splines of A_phi/r and
 * B_phi/r, even in r, so that B = curl(A_phi) + B_phi is divergence-free and smooth on the axis. Throws
 * InputError at the place of what is wrong.
 */
export function readMeanFieldComponent(input: YamlInput, section: Section, path: YamlPath, sources: ComponentSources): CosmicRayLayer {
  if (section.kind !== 'field') throw new InputError('the model "mean-field" is a field, but a density is wanted', placeAt(input, [...path, 'model']));
  const given = checkYaml(input, meanFieldSchema(section), path);
  const { field, grids } = placed(input, [...path, 'file'], () => {
    const opened = sources.open(given.file);
    const field = meanFieldOf(opened, given.file);
    refuseSmall(field, given.file, sources.volume);
    return { field, grids: gridsOf(field, opened.sha256) };
  });
  const model = meanFieldModel(given.name, given.file, field);
  return { name: given.name, model, parameters: { strength: given.strength ?? field.strongestUG }, choices: {}, grids, ...readShape(input, path, model, given) };
}

function refuseSmall({ radii, heights, radialStepKpc, verticalStepKpc, lowestKpc }: MeanField, file: string, { radiusKpc, heightKpc }: ComponentSources['volume']): void {
  const radius = (radii - 1) * radialStepKpc;
  const height = Math.min(-lowestKpc, lowestKpc + (heights - 1) * verticalStepKpc);
  const slack = 1 + 1e-9;
  if (radiusKpc <= radius * slack && heightKpc <= height * slack) return;
  throw new InputError(`${file} reaches to r = ${radius.toPrecision(4)} kpc and |z| = ${height.toPrecision(4)} kpc and does not cover the scene's volume, ${radiusKpc} kpc and ${heightKpc} kpc: make the volume smaller, or solve in a larger one`);
}

function gridsOf(field: MeanField, sha256: string): Readonly<Record<string, GriddedFunction>> {
  const { heights, radii, radialStepKpc, verticalStepKpc, potentialOverRadius, azimuthalOverRadius } = field;
  const panelKpc = 4 * Math.min(radialStepKpc, verticalStepKpc);
  const grid = (name: string, values: Float64Array): GriddedFunction => ({ grid: interpolateGrid(`${sha256}/${name}`, values, [heights, radii], ['free', 'even']), panelKpc });
  return { potentialOverRadius: grid('potential', potentialOverRadius), azimuthalOverRadius: grid('azimuthal', azimuthalOverRadius) };
}

function meanFieldModel(name: string, file: string, { lowestKpc, radialStepKpc, verticalStepKpc, strongestUG }: MeanField): Model {
  const where = [`(z - (${lowestKpc}))/${verticalStepKpc}`, `r/${radialStepKpc}`];
  const scaled = (sample: string): string => `strength/${strongestUG}*r*${sample}`;
  return {
    name: 'mean-field',
    kind: 'field',
    title: `Solved field "${name}"`,
    meaning: 'An axisymmetric field that obeys the mean-field dynamo equations, solved by the command dynamo.',
    source: file,
    parameters: [{ name: 'strength', unit: 'uG', range: [strength.min, strength.max], meaning: 'largest |B_phi|; the whole field scales with it' }],
    choices: [],
    define: {},
    grids: { potentialOverRadius: where, azimuthalOverRadius: where },
    formulas: { potential: { phi: scaled('potentialOverRadius') }, field: { phi: scaled('azimuthalOverRadius') } },
    edges: {},
    checks: [],
  };
}
