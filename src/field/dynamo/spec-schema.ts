import { z } from 'zod';
import { formulasByName } from '../../model/model-schema.ts';
import type { Limits } from '../../units/limits.ts';
import { quoteValue } from '../../units/quote.ts';
import { keys, listOf, oneOf, plainNumber, quantity, words } from '../../units/schema.ts';

const above = { above: true };

function limited(unit: string, min: number, max: number, meaning: string, more: Partial<Limits> = {}): z.ZodType<number> {
  return quantity({ unit, min, max, ...more }, unit, meaning);
}

/** A quantity, or a formula: text either way, told apart by the reader. */
const profile = z.union([z.string(), z.number()], {
  error: ({ input }) => `${quoteValue(input)} is given where a quantity such as "2 km/s" or a formula such as "2*z/h" is wanted`,
});

const length = (meaning: string): z.ZodType<number> => limited('kpc', 0, 1000, meaning, above);
const speed = (meaning: string): z.ZodType<number> => limited('km/s', 0, 1e5, meaning);
const most = 10_000;
const cells = (meaning: string): z.ZodType<number> => plainNumber({ unit: '', min: 16, max: 1000, whole: true }, meaning);

/**
 * The dynamo's file. Profiles are quantities or formulas of r, z (kpc), Omega (km/s/kpc) and shear
 * r dOmega/dr, of l, u and h from `turbulence`, and of `parameters`; lengths in kpc, speeds in km/s.
 */
export const dynamoSchema = keys({
  'gyrelight-dynamo': z.literal(1),
  title: z.string({ error: ({ input }) => `${quoteValue(input)} is given where a text is wanted` }).default(''),
  volume: keys({ radius: length('radius of the volume that is wanted'), height: length('its half height') }),
  rotation: keys({
    file: words('the name of a CSV file with the columns radius and speed').optional(),
    radius: listOf(limited('kpc', 0, 1000, 'a radius'), 'radii', 4, most).optional(),
    speed: z.union([listOf(limited('km/s', -1e5, 1e5, 'a speed'), 'speeds', 4, most), z.string()], { error: ({ input }) => `${quoteValue(input)} is given where speeds beside "radius", or a formula of r such as "220*tanh(r/2)", are wanted` }).optional(),
    angularSpeed: words('a formula such as "220/hypot(r, 2)"').optional(),
  }),
  turbulence: keys({
    cell: length('l, size of the turbulent cells').default(0.1),
    speed: limited('km/s', 0, 1e5, 'u, their rms speed', above).default(10),
    height: length('h, half thickness of the turbulent disc').default(0.5),
  }).default({ cell: 0.1, speed: 10, height: 0.5 }),
  parameters: z.record(z.string(), z.union([z.string(), z.number()])).default({}),
  define: formulasByName.default({}),
  alpha: profile.default('l^2*Omega/(h + l^2*Omega/u)*(z/h)*exp(0.5 - 0.5*(z/h)^2)'),
  diffusivity: profile.default('l*u/3*(10 - 9*exp(-(z/(4*h))^2))'),
  wind: keys({
    speed: speed('speed far above the disc').optional(),
    height: length('height at which half the speed is reached').optional(),
    apex: length('conical wind: its lines come from a point on the axis so far behind the plane').optional(),
    radial: profile.optional(),
    vertical: profile.optional(),
  }).default({}),
  equipartition: profile.default('5 uG'),
  surroundings: keys({
    ratio: plainNumber({ unit: '', min: 1, max: 1e6 }, 'diffusivity outside the volume over that at its edge; large stands for vacuum').default(1000),
    reach: plainNumber({ unit: '', min: 1, max: 20 }, 'radii of the volume between its edge and the outer boundary').default(3),
  }).default({ ratio: 1000, reach: 3 }),
  grid: keys({ radial: cells('cells over the radius'), vertical: cells('cells over the half height') }).default({ radial: 60, vertical: 80 }),
  solve: keys({
    parity: oneOf(['both', 'even', 'odd', 'mixed'], 'parity').default('both'),
    modes: plainNumber({ unit: '', min: 1, max: 10, whole: true }, 'modes of each parity').default(3),
    state: oneOf(['saturated', 'mode'], 'state').default('saturated'),
    strength: limited('uG', 0, 1e4, 'largest |B_phi| of a `mode`, whose size is free', above).optional(),
    tolerance: plainNumber({ unit: '', min: 1e-6, max: 0.5 }, 'largest relative error left between the two grids').default(0.03),
  }).default({ parity: 'both', modes: 3, state: 'saturated', tolerance: 0.03 }),
  thinDisc: keys({
    radii: listOf(length('a radius'), 'radii', 1, 100),
    halfThickness: length('|z| at which the field ends; h where left out').optional(),
  }).optional(),
});

/** What the schema makes of a file. */
export type DynamoFile = z.output<typeof dynamoSchema>;
