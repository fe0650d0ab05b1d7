import { z } from 'zod';
import { quoteValue } from '../units/quote.ts';
import { keys, listOf, nameText, oneOf, quantityOfEither, words } from '../units/schema.ts';
import { limited, sceneLimits } from './limits.ts';
import { resolvedSchema } from './resolved-turbulence.ts';

/** Most components in a section, and most bands. */
const MAX_ITEMS = 100;
/** Most separate frequencies in one band. */
const MAX_FREQUENCIES = 10000;

const galaxy = keys({
  distance: limited(sceneLimits.distance),
  inclination: limited(sceneLimits.inclination),
  positionAngle: limited(sceneLimits.positionAngle),
  volume: keys({ radius: limited(sceneLimits.volumeRadius), height: limited(sceneLimits.volumeHeight) }),
  centre: keys({ ra: limited(sceneLimits.ra), dec: limited(sceneLimits.dec) }).optional(),
});

const turbulence = keys(
  {
    unresolved: keys({
      rms: limited(sceneLimits.rms),
      cell: limited(sceneLimits.cell),
      follows: nameText().optional(),
    }).optional(),
    ordered: keys({
      rms: limited(sceneLimits.orderedRms),
      along: oneOf(['azimuth', 'pitch'], 'along'),
      pitch: limited(sceneLimits.orderedPitch).optional(),
      cell: limited(sceneLimits.cell),
      follows: nameText().optional(),
    }).optional(),
    resolved: resolvedSchema.optional(),
  },
);

const dust = keys({
  follows: nameText().optional(),
  polarization: limited(sceneLimits.dustPolarization),
  hydrogenRatio: limited(sceneLimits.hydrogenRatio).default(1),
  temperature: limited(sceneLimits.dustTemperature),
  opacity: limited(sceneLimits.dustOpacity),
  at: limited(sceneLimits.dustFrequency),
});

const zeeman = keys({ follows: nameText().optional() });

const freeFree = keys({ temperature: limited(sceneLimits.temperature) });

const pixelCount = limited(sceneLimits.pixels);
const pixels = z.union([pixelCount, z.tuple([pixelCount, pixelCount])], {
  error: (issue) => {
    const what = 'a number of pixels n, or [nx, ny], is wanted';
    if (issue.input === undefined) return `is missing: ${what}`;
    const isNumber = typeof issue.input === 'number' && Number.isFinite(issue.input);
    return (isNumber && issue.errors[0][0]?.message) || `${quoteValue(issue.input)} is given where ${what}`;
  },
});

const band = keys({
  name: nameText(),
  from: limited(sceneLimits.frequency).optional(),
  to: limited(sceneLimits.frequency).optional(),
  channels: limited(sceneLimits.channels).optional(),
  at: listOf(limited(sceneLimits.frequency), 'frequencies', 1, MAX_FREQUENCIES).optional(),
  width: limited(sceneLimits.width).optional(),
  noise: quantityOfEither([sceneLimits.noiseBeam, sceneLimits.noiseSteradian]).optional(),
});

const foreground = keys({
  depth: limited(sceneLimits.foregroundDepth).default(0),
  gradient: keys({
    amount: quantityOfEither([sceneLimits.gradientAngular, sceneLimits.gradientLinear]),
    angle: limited(sceneLimits.gradientAngle),
  }).optional(),
  random: keys({ rms: limited(sceneLimits.screenRms), scale: limited(sceneLimits.screenScale) }).optional(),
});

const missingBelow = z.union([limited(sceneLimits.missingWavelengths), limited(sceneLimits.missingScale).transform((arcsec) => ({ arcsec }))], {
  error: (issue) => {
    const what = 'a number of wavelengths such as 500, or an angle such as "300 arcsec", is wanted';
    if (issue.input === undefined) return `is missing: ${what}`;
    const option = typeof issue.input === 'number' ? 0 : 1;
    const own = typeof issue.input === 'number' || typeof issue.input === 'string' ? issue.errors[option]?.[0]?.message : undefined;
    return own || `${quoteValue(issue.input)} is given where ${what}`;
  },
});

const observation = keys(
  {
    image: keys({
      pixels,
      pixel: quantityOfEither([sceneLimits.pixelArcsec, sceneLimits.pixelKpc]),
    }),
    bands: listOf(band, 'bands', 1, MAX_ITEMS),
    beam: keys({
      major: limited(sceneLimits.beamMajor),
      minor: limited(sceneLimits.beamMinor),
      angle: limited(sceneLimits.beamAngle).optional(),
    }).optional(),
    noise: quantityOfEither([sceneLimits.noiseBeam, sceneLimits.noiseSteradian]).optional(),
    foreground: foreground.optional(),
    shortSpacings: keys({ missingBelow }).optional(),
  },
);

const numerics = keys({
  tolerance: limited(sceneLimits.tolerance).default(1e-4),
  seed: limited(sceneLimits.seed).default(1),
  bits: z
    .union([z.literal(32), z.literal(64)], { error: ({ input }) => `${quoteValue(input)} is not allowed: bits is 32 or 64` })
    .default(32),
});

/**
 * The scene file, with schemas for an item of each list of components: loose ones where the
 * components are checked afterwards against their models, exact ones for the JSON Schema.
 */
export function sceneSchema<Item extends z.ZodType>(items: { readonly field: Item; readonly density: Item; readonly layer: Item }) {
  return keys(
    {
      gyrelight: z.literal(1),
      title: z.string({ error: ({ input }) => `${quoteValue(input)} is given where a text is wanted` }).max(500, { error: 'has more than 500 characters' }).default(''),
      galaxy,
      field: listOf(items.field, 'components', 0, MAX_ITEMS).default([]),
      thermalElectrons: listOf(items.density, 'components', 0, MAX_ITEMS).default([]),
      cosmicRays: keys({
        index: limited(sceneLimits.index),
        layers: listOf(items.layer, 'layers', 1, MAX_ITEMS).optional(),
        equipartition: keys({ protonRatio: limited(sceneLimits.protonRatio) }).optional(),
        scaleTo: keys({ flux: limited(sceneLimits.flux), at: limited(sceneLimits.fluxAt) }).optional(),
      }),
      turbulence: turbulence.default({}),
      freeFree: freeFree.optional(),
      dust: dust.optional(),
      zeeman: zeeman.optional(),
      observation,
      numerics: numerics.default({ tolerance: 1e-4, seed: 1, bits: 32 }),
    },
  );
}

/** A component before its model is looked up. */
export const looseComponent = z.looseObject(
  { model: words('the name of a model') },
  {
    error: ({ input }) =>
      `${quoteValue(input)} is given where a component is wanted, such as {model: uniform, x: 1 uG, y: 0 uG, z: 0 uG}`,
  },
);

/** What `sceneSchema` with loose components makes of a scene file. */
export type SceneFile = z.output<ReturnType<typeof sceneSchema<typeof looseComponent>>>;
