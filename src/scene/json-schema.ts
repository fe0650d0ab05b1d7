import { z } from 'zod';
import { modelLibrary } from '../model/library.ts';
import { componentSchema } from './components.ts';
import { cubeSchema } from './cube-model.ts';
import { inlineSchema } from './inline-model.ts';
import { meanFieldSchema } from './mean-field-model.ts';
import { sceneSchema } from './scene-schema.ts';
import { sections } from './section.ts';
import type { Section } from './section.ts';
import { tabulatedFlareSchema } from './tabulated-flare-model.ts';

/** JSON Schema (draft 2020-12) of scene files, for editors: keys, models, units and meanings. */
export function sceneJsonSchema(): Record<string, unknown> {
  const schema = sceneSchema<z.ZodType>({
    field: anyComponent(sections.field),
    density: anyComponent(sections.thermalElectrons),
    layer: anyComponent(sections.cosmicRays),
  });
  return { ...z.toJSONSchema(schema, { io: 'input' }), title: 'Gyrelight scene, version 1' };
}

function anyComponent(section: Section): z.ZodType {
  const models = [...modelLibrary().values()].filter((model) => model.kind === section.kind);
  const ofLibrary = models.map((model) => componentSchema(model, section).meta({ title: model.title, description: model.meaning }));
  const solved = section.kind === 'field' ? [meanFieldSchema(section), tabulatedFlareSchema(section)] : [];
  return z.union([...ofLibrary, cubeSchema(section), ...solved, inlineSchema(section)]);
}
