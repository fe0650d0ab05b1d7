import { z } from 'zod';
import { getModel } from '../model/library.ts';
import { fillValues, valuesShape } from '../model/parameters.ts';
import type { Model } from '../model/types.ts';
import { InputError } from '../units/input-error.ts';
import { quoteValue } from '../units/quote.ts';
import { keys, listOf, nameText, quantity } from '../units/schema.ts';
import { checkYaml, placeAt, type YamlInput, type YamlPath } from '../units/yaml-input.ts';
import type { ComponentSources } from './component-sources.ts';
import { originGrid, type OriginGrid } from './opening-law.ts';
import { placed, type Section } from './section.ts';
import { readShape } from './shape.ts';
import type { CosmicRayLayer } from './types.ts';

const radius = quantity({ unit: 'kpc', min: 0, max: 1e4 }, 'kpc', 'radius in the plane');
const angle = quantity({ unit: 'deg', min: 0, max: 85 }, 'rad', 'angle from the axis of the line that leaves there');
const row = z.tuple([radius, angle], { error: ({ input }) => `${quoteValue(input)} is given where a radius and an angle such as [3 kpc, 30 deg] are wanted` });

/** The linear law's model, its law taken from a grid in place of its parameters. */
function tabulatedModel(steps?: OriginGrid): Model {
  const linear = getModel('linear-flare-halo', 'field');
  return {
    ...linear,
    name: 'tabulated-flare-halo',
    title: 'Flared halo, opening angle from a table',
    meaning: 'Poloidal lines, straight far from the disc: a line through (r_0, 0) is r = r_0 + Z T(r_0) with T the tangent of a tabulated angle.',
    parameters: linear.parameters.filter(({ name }) => name !== 'openingAngle' && name !== 'reference'),
    define: { ...linear.define, r0: 'r*originShare' },
    ...(steps && { grids: { originShare: [`(${linear.define.Z})/${steps.heightStepKpc}`, `r/${steps.radialStepKpc}`] } }),
    checks: [],
  };
}

/** The keys of a halo whose opening law is a table. */
export function tabulatedFlareSchema(section: Section) {
  return keys({
    model: z.literal('tabulated-flare-halo'),
    name: nameText().default('tabulated-flare-halo'),
    ...valuesShape(tabulatedModel()),
    opening: listOf(row, 'rows such as [3 kpc, 30 deg]', 2, 200),
    ...section.extra,
  });
}

/**
 * A flared or wound halo whose opening angle is a table of radii and angles (physics.md section 4.4). Its
 * flux function is made from a spline of r_0/r, so that B = curl A holds. Throws InputError at the place
 * of what is wrong.
 */
export function readTabulatedFlare(input: YamlInput, section: Section, path: YamlPath, { volume }: ComponentSources): CosmicRayLayer {
  if (section.kind !== 'field') throw new InputError('the model "tabulated-flare-halo" is a field, but a density is wanted', placeAt(input, [...path, 'model']));
  const given = checkYaml(input, tabulatedFlareSchema(section), path);
  const origin = placed(input, [...path, 'opening'], () => originGrid(given.opening, volume));
  const model = tabulatedModel(origin);
  const values = placed(input, path, () => fillValues(model, given));
  const panelKpc = 8 * Math.min(origin.heightStepKpc, origin.radialStepKpc);
  return { name: given.name, model, ...values, grids: { originShare: { grid: origin.grid, panelKpc } }, ...readShape(input, path, model, given) };
}
