import { z } from 'zod';
import { limited, sceneLimits } from '../scene/limits.ts';
import { quoteValue } from '../units/quote.ts';
import { keys, listOf, oneOf, plainNumber, words } from '../units/schema.ts';
import { mapNames, measureNames } from './types.ts';

/** Most values of one varied quantity, and most varied quantities. */
const mostValues = 1_000_000;
export const mostVaried = 64;

const value = z.union([z.string(), z.number()], { error: ({ input }) => `${quoteValue(input)} is given where a value such as "2 kpc" is wanted` });

const range = keys({
  from: value,
  to: value,
  steps: plainNumber({ unit: '', min: 2, max: mostValues, whole: true }, 'values of a grid, both ends counted').optional(),
  spacing: oneOf(['linear', 'log', 'cos'], 'spacing').default('linear'),
});

const varied = z.union([listOf(value, 'values', 1, mostValues), range], {
  error: ({ input }) => `${quoteValue(input)} is given where a list of values or {from: 0 deg, to: 85 deg, steps: 18} (steps in a grid only; spacing: linear, log or cos) is wanted`,
});

const named = <const Names extends readonly string[]>(names: Names, what: string) => listOf(oneOf(names, what), `${what}s`, 1, names.length);

/** The sweep file: see architecture.md, "Files". */
export const sweepSchema = keys({
  'gyrelight-sweep': z.literal(1),
  title: z.string({ error: ({ input }) => `${quoteValue(input)} is given where a text is wanted` }).default(''),
  scene: words('the name of a scene file').optional(),
  scenes: z.record(z.string(), words('the name of a scene file'), { error: ({ input }) => `${quoteValue(input)} is given where names with scene files are wanted, such as {cored: cored.scene.yaml}` }).optional(),
  vary: z.record(z.string(), varied, { error: ({ input }) => (input === undefined ? 'is missing: paths with values are wanted, such as {galaxy.inclination: [20 deg, 40 deg]}' : `${quoteValue(input)} is given where paths with values are wanted`) }),
  design: oneOf(['grid', 'sobol', 'sensitivity'], 'design').default('grid'),
  samples: plainNumber({ unit: '', min: 2, max: 100_000_000, whole: true }, 'points of a Sobol design, base samples of a sensitivity design').optional(),
  seed: plainNumber({ unit: '', min: 0, max: Number.MAX_SAFE_INTEGER, whole: true }, 'of the scrambling of Sobol points').default(1),
  realisations: plainNumber({ unit: '', min: 0, max: 1_000_000, whole: true }, 'draws of noise and turbulence per point; 0: expected values').default(0),
  noise: words('an rms such as 20 uJy/beam').optional(),
  measure: named(measureNames, 'measure').default(['asymmetry', 'polarization']),
  maps: named(mapNames, 'map').default([]),
  ring: z.tuple([limited(sceneLimits.volumeRadius), limited(sceneLimits.volumeRadius)], { error: ({ input }) => `${quoteValue(input)} is given where two radii such as [4 kpc, 7 kpc] are wanted` }).optional(),
  sectors: plainNumber({ unit: '', min: 2, max: 3600, whole: true }, 'sectors of the ring').default(24),
  threshold: plainNumber({ unit: '', min: 0, max: 1e6, above: true }, 'sigma that count as seen').default(5),
  heatMap: z.tuple([z.string(), z.string()], { error: ({ input }) => `${quoteValue(input)} is given where two varied paths are wanted` }).optional(),
});
