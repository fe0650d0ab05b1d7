import { InputError } from '../units/input-error.ts';
import { convertQuantity, formatQuantity } from '../units/quantity.ts';
import { placeAt } from '../units/yaml-input.ts';
import type { YamlInput, YamlPath } from '../units/yaml-input.ts';
import type { SceneFile } from './scene-schema.ts';
import type { Band, Beam, ImageSpec, Observation } from './types.ts';

type ObservationFile = SceneFile['observation'];
type BandFile = ObservationFile['bands'][number];

const TOP: YamlPath = ['observation'];
const MAX_CHANNELS = 65536;
/** Widest image: the small-angle geometry of physics.md section 2 is meant for galaxies. */
const MAX_WIDTH_DEG = 20;

/** The observation of a checked scene file. Throws InputError with its place. */
export function readObservation(input: YamlInput, file: ObservationFile, distanceKpc: number): Observation {
  const beam = file.beam && readBeam(input, file.beam);
  const noise = readNoise(input, TOP, file.noise, beam);
  return {
    image: readImage(input, file.image, distanceKpc),
    bands: readBands(input, file.bands, beam),
    ...(beam && { beam }),
    ...(noise !== undefined && { noise }),
    ...readForeground(file.foreground, distanceKpc),
    ...(file.shortSpacings && { missingWavelengths: missingWavelengths(file.shortSpacings.missingBelow) }),
  };
}

type Foreground = Pick<Observation, 'foregroundDepth' | 'foregroundGradient' | 'foregroundScreen'>;

function readForeground(file: ObservationFile['foreground'], distanceKpc: number): Foreground {
  const gradient = file?.gradient;
  const random = file?.random;
  const perKpc = gradient?.amount.unit === 'rad/m^2/kpc' ? gradient.amount.value : undefined;
  return {
    foregroundDepth: file?.depth ?? 0,
    ...(gradient && {
      foregroundGradient: {
        radM2PerArcsec: perKpc === undefined ? gradient.amount.value : gradientPerArcsec(perKpc, distanceKpc),
        ...(perKpc !== undefined && { radM2PerKpc: perKpc }),
        angle: gradient.angle,
      },
    }),
    ...(random && { foregroundScreen: { rmsRadM2: random.rms, scaleArcsec: random.scale } }),
  };
}

/** A gradient over the sky (rad m^-2 per arcsec) of one per kpc at a distance. */
export function gradientPerArcsec(radM2PerKpc: number, distanceKpc: number): number {
  return radM2PerKpc / arcsecOf(1, distanceKpc);
}

/** A number counts wavelengths; an angle is the period of the spacing that is 1/angle wavelengths long. */
function missingWavelengths(missingBelow: NonNullable<ObservationFile['shortSpacings']>['missingBelow']): number {
  return typeof missingBelow === 'number' ? missingBelow : 1 / convertQuantity(missingBelow.arcsec, 'arcsec', 'rad');
}

/** The angle, arcsec, that a length spans at a distance (small angle, physics.md section 9.5). */
export function arcsecOf(lengthKpc: number, distanceKpc: number): number {
  return convertQuantity(lengthKpc / distanceKpc, 'rad', 'arcsec');
}

function readImage(input: YamlInput, { pixels, pixel }: ObservationFile['image'], distanceKpc: number): ImageSpec {
  const [nx, ny] = Array.isArray(pixels) ? pixels : [pixels, pixels];
  const inKpc = pixel.unit === 'kpc';
  const pixelArcsec = inKpc ? arcsecOf(pixel.value, distanceKpc) : pixel.value;
  const widthDeg = (Math.max(nx, ny) * pixelArcsec) / 3600;
  if (widthDeg > MAX_WIDTH_DEG) {
    const reason = `the image is ${formatQuantity(Number(widthDeg.toPrecision(3)), 'deg')} wide; at most ${MAX_WIDTH_DEG} deg are allowed`;
    throw new InputError(reason, placeAt(input, [...TOP, 'image', 'pixel']));
  }
  return { nx, ny, pixelArcsec, ...(inKpc && { pixelKpc: pixel.value }) };
}

/** A circular beam may leave its angle out. */
function readBeam(input: YamlInput, { major, minor, angle }: NonNullable<ObservationFile['beam']>): Beam {
  if (minor > major) {
    const [small, large] = [formatQuantity(major, 'arcsec'), formatQuantity(minor, 'arcsec')];
    throw new InputError(`the minor axis of the beam, ${large}, is larger than its major axis, ${small}`, placeAt(input, [...TOP, 'beam', 'minor']));
  }
  if (angle === undefined && minor < major) {
    throw new InputError('observation.beam.angle is missing: an elliptical beam needs it', placeAt(input, [...TOP, 'beam']));
  }
  return { majorArcsec: major, minorArcsec: minor, angle: angle ?? 0 };
}

function readNoise(input: YamlInput, path: YamlPath, noise: ObservationFile['noise'], beam: Beam | undefined): number | undefined {
  if (noise === undefined) return undefined;
  const wanted = beam ? 'Jy/beam' : 'Jy/sr';
  if (noise.unit === wanted) return noise.value;
  const given = formatQuantity(noise.value, noise.unit);
  const reason = beam
    ? `noise is ${given}, but there is a beam: give it in Jy/beam`
    : `noise is ${given}, but there is no beam: give a beam, or noise in Jy/sr`;
  throw new InputError(reason, placeAt(input, [...path, 'noise']));
}

function readBands(input: YamlInput, files: readonly BandFile[], beam: Beam | undefined): Band[] {
  let total = 0;
  return files.map((file, index) => {
    const path = [...TOP, 'bands', index];
    const fail = (reason: string, key?: string): never => {
      throw new InputError(`band "${file.name}": ${reason}`, placeAt(input, path, key));
    };
    // Band names become file names, which some systems compare without case.
    const same = files.findIndex((other) => other.name.toLowerCase() === file.name.toLowerCase());
    if (same !== index) fail(`the name is taken by band "${files[same].name}" (capitals do not count)`, 'name');
    const band = file.at === undefined ? readRange(file, fail) : readList(file, file.at, fail);
    total += band.channels.length;
    if (total > MAX_CHANNELS) fail(`with it the scene has ${total} channels; at most ${MAX_CHANNELS} are allowed`);
    const noise = readNoise(input, path, file.noise, beam);
    return { ...band, ...(noise !== undefined && { noise }) };
  });
}

type Fail = (reason: string, key?: string) => never;

function readRange(file: BandFile, fail: Fail): Band {
  const { name, from, to, channels } = file;
  if (file.width !== undefined) fail('"width" goes with "at" only', 'width');
  if (from === undefined || to === undefined || channels === undefined) {
    const missing = ['from', 'to', 'channels'].filter((key) => file[key as 'from'] === undefined);
    return fail(`${missing.map((key) => `"${key}"`).join(' and ')} missing: give "from", "to" and "channels", or "at"`);
  }
  if (from >= to) fail(`from ${formatQuantity(from, 'Hz', 'GHz')} is not below to ${formatQuantity(to, 'Hz', 'GHz')}`, 'to');
  const widthHz = (to - from) / channels;
  return {
    name,
    channels: Array.from({ length: channels }, (_, k) => ({ frequencyHz: from + (k + 0.5) * widthHz, widthHz })),
    centreHz: (from + to) / 2,
  };
}

function readList(file: BandFile, at: readonly number[], fail: Fail): Band {
  const { name, width = 0 } = file;
  for (const key of ['from', 'to', 'channels'] as const) {
    if (file[key] !== undefined) fail(`"${key}" and "at" exclude each other`, key);
  }
  const low = Math.min(...at);
  if (width >= 2 * low) fail(`the width ${formatQuantity(width, 'Hz', 'GHz')} reaches below zero frequency`, 'width');
  return {
    name,
    channels: at.map((frequencyHz) => ({ frequencyHz, widthHz: width })),
    ...(at.length === 1 && { centreHz: at[0] }),
  };
}
