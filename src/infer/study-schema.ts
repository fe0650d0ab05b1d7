import { z } from 'zod';
import { limited, sceneLimits } from '../scene/limits.ts';
import { quoteValue } from '../units/quote.ts';
import { keys, listOf, oneOf, plainNumber, quantity, words } from '../units/schema.ts';

/** Most data entries, files in one, hypotheses and free parameters. */
const MAX_ENTRIES = 100;
const MAX_FILES = 100_000;
const MAX_HYPOTHESES = 100;

const dataQuantity = oneOf(['I', 'Q', 'U', 'P', 'chi', 'RM'], 'quantity');

const method = oneOf(['least-squares', 'walkers', 'nested'], 'method');

const dataEntry = keys({
  quantity: dataQuantity,
  sources: words('the name of a CSV file').optional(),
  sectors: words('the name of a CSV file').optional(),
  spectrum: words('the name of a CSV file').optional(),
  from: listOf(limited(sceneLimits.frequency), 'frequencies', 2, MAX_FILES).optional(),
  ring: z.tuple([limited(sceneLimits.volumeRadius), limited(sceneLimits.volumeRadius)], { error: ({ input }) => `${quoteValue(input)} is given where two radii such as [4 kpc, 7 kpc] are wanted` }).optional(),
  scatter: words('a scatter such as 10 rad/m^2').optional(),
  file: words('the name of a FITS file').optional(),
  files: listOf(words('the name of a FITS file'), 'files, one per channel', 1, MAX_FILES).optional(),
  noise: words('an rms such as 20 uJy/beam').optional(),
  noiseMap: words('the name of a FITS file').optional(),
  frequency: limited(sceneLimits.frequency).optional(),
  width: limited(sceneLimits.width).optional(),
  beam: keys({
    major: limited(sceneLimits.beamMajor),
    minor: limited(sceneLimits.beamMinor),
    angle: limited(sceneLimits.beamAngle),
  }).optional(),
  mask: words('the name of a FITS file').optional(),
  zeroLevel: words('a brightness such as 10 uJy/beam').optional(),
  unit: words('a unit such as Jy/beam').optional(),
  convention: oneOf(['IAU', 'U-reversed'], 'convention').optional(),
  angleOf: oneOf(['E', 'B'], 'angleOf').optional(),
  correlation: quantity({ unit: 'arcsec', min: 0, max: 36000 }, 'arcsec', 'FWHM of the autocorrelation of the noise; 0: independent pixels').optional(),
});

/** A text with its unit, or a bare number where there is none. */
const value = z.union([z.string(), z.number()]);
const pair = z.tuple([value, value]);
const prior = z.union([pair, z.strictObject({ normal: pair }), z.strictObject({ logUniform: pair }), z.strictObject({ isotropic: pair })], {
  error: ({ input }) => `${quoteValue(input)} is given where [low, high], {normal: [mean, sigma]}, {logUniform: [low, high]} or {isotropic: [low, high]} is wanted`,
});

const where = z.record(z.string(), words('a path of the scene')).default({});
/** Numbers enter a formula, and leave it, in the shown units of their paths. */
const formula = keys({ formula: words('a formula such as 0.5*a'), where });
const derivedFormula = keys({ formula: words('a formula such as a/b'), where, unit: z.string().default('') });

const hypothesis = keys({
  name: words('a name'),
  scene: words('the name of a scene file'),
  free: z
    .record(z.string(), prior, { error: ({ input }) => `${quoteValue(input)} is given where paths with ranges are wanted, such as {galaxy.inclination: [30 deg, 45 deg]}` })
    .default({}),
  tied: z.record(z.string(), formula, { error: ({ input }) => `${quoteValue(input)} is given where paths with formulas are wanted` }).default({}),
  derived: z.record(z.string(), derivedFormula, { error: ({ input }) => `${quoteValue(input)} is given where names with formulas are wanted` }).default({}),
});

const candidateBeam = keys({ major: limited(sceneLimits.beamMajor), minor: limited(sceneLimits.beamMinor), angle: limited(sceneLimits.beamAngle) }).optional();
const bandNoise = words('an rms such as 20 uJy/beam');
const bandTime = plainNumber({ unit: '', min: 0, max: 1e6, above: true }, 'observing time over that in which the noise is reached').default(1);
const candidate = keys({
  name: words('a name').optional(),
  at: listOf(limited(sceneLimits.frequency), 'frequencies', 1, MAX_FILES).optional(),
  from: limited(sceneLimits.frequency).optional(),
  to: limited(sceneLimits.frequency).optional(),
  channels: plainNumber({ unit: '', min: 1, max: 10_000, whole: true }).optional(),
  width: limited(sceneLimits.width).optional(),
  noise: bandNoise,
  beam: candidateBeam,
  time: bandTime,
});
/** One frequency after the other, equally spaced in its logarithm. */
const scan = keys({
  from: limited(sceneLimits.frequency),
  to: limited(sceneLimits.frequency),
  steps: plainNumber({ unit: '', min: 2, max: 200, whole: true }),
  width: limited(sceneLimits.width).optional(),
  noise: bandNoise,
  beam: candidateBeam,
  time: bandTime,
});

const count = (least: number, most: number, meaning: string): z.ZodType<number> => plainNumber({ unit: '', min: least, max: most, whole: true }, meaning);
const turbulence = z.union([
  z.literal('single'),
  keys({
    realisations: count(8, 1000, 'random fields that the covariance is estimated from').default(40),
    mean: count(1, 100, 'random fields that every model is the mean of').default(4),
    rings: count(1, 20, 'rings of sectors in which maps are compared').default(3),
    sectors: count(2, 72, 'sectors of a ring').default(8),
  }),
], { error: ({ input }) => `${quoteValue(input)} is given where \`single\` or numbers such as {realisations: 40, mean: 4, rings: 3, sectors: 8} are wanted` });

/** The study file: see architecture.md, "Files". */
export const studySchema = keys({
  'gyrelight-study': z.literal(1),
  title: z.string({ error: ({ input }) => `${quoteValue(input)} is given where a text is wanted` }).default(''),
  data: listOf(dataEntry, 'data entries', 1, MAX_ENTRIES),
  hypotheses: listOf(hypothesis, 'hypotheses', 1, MAX_HYPOTHESES),
  method: method.default('least-squares'),
  forecast: keys({ bands: listOf(candidate, 'bands', 1, MAX_ENTRIES).optional(), scan: scan.optional() }).optional(),
  foreground: z.union([z.literal('fixed'), prior], { error: ({ input }) => `${quoteValue(input)} is given where \`fixed\` or a prior such as {normal: [0 rad/m^2, 20 rad/m^2]} is wanted` }).optional(),
  calibration: z.record(z.string(), prior, { error: ({ input }) => `${quoteValue(input)} is given where frequencies with priors are wanted, such as {1.4 GHz: {normal: [1, 0.05]}}` }).default({}),
  turbulence: turbulence.default({ realisations: 40, mean: 4, rings: 3, sectors: 8 }),
  seed: plainNumber({ unit: '', min: 0, max: Number.MAX_SAFE_INTEGER, whole: true }).default(1),
});
