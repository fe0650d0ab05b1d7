import { sumsOfTwo, laws } from '../measure/laws/index.ts';
import type { DiscOrientation } from '../measure/disc.ts';
import type { Beam, Scene } from '../scene/types.ts';
import { InputError } from '../units/input-error.ts';
import { parseQuantity } from '../units/quantity.ts';
import { loadScene } from './load-scene.ts';

/** The flags of `gyrelight measure`, as commander gives them. */
export interface MeasureFlags {
  readonly galaxy?: string;
  readonly inclination?: string;
  readonly positionAngle?: string;
  readonly centre?: string;
  readonly distance?: string;
  readonly frequency?: string;
  readonly width?: string;
  readonly beam?: string;
  readonly smooth?: string;
  readonly noise?: string;
  readonly convention?: 'IAU' | 'U-reversed';
  readonly radii?: string;
  readonly sectors: string;
  readonly firstSector: string;
  readonly depths?: string;
  readonly weights: 'equal' | 'noise';
  readonly spectralIndex: string;
  readonly threshold: string;
  readonly deconvolve?: boolean;
  readonly thermalFraction?: string;
  readonly thermalAt?: string;
  readonly laws: 'none' | 'integrated' | 'sectors' | 'pixels';
  readonly sums?: boolean;
  readonly axis?: string;
  readonly origin?: boolean;
  readonly memory: string;
  readonly out: string;
  readonly json?: boolean;
  readonly quiet?: boolean;
}

/** The number of a flag, placed. */
export function flagQuantity(name: string, text: string, unit: string): number {
  try {
    return parseQuantity(text.trim(), unit);
  } catch (error) {
    throw error instanceof InputError ? error.at({ flag: `--${name} ${text}` }) : error;
  }
}

/** A plain number of a flag within limits. */
export function flagNumber(name: string, text: string, least: number, most: number, whole = false): number {
  const value = Number(text);
  if (text.trim() === '' || !(value >= least && value <= most) || (whole && !Number.isInteger(value))) {
    throw new InputError(`expected a ${whole ? 'whole ' : ''}number from ${least} to ${most}`, { flag: `--${name} ${text}` });
  }
  return value;
}

/** Numbers with units, parted by commas. */
export function flagList(name: string, text: string, unit: string): number[] {
  return text.split(',').map((part) => {
    try {
      return parseQuantity(part.trim(), unit);
    } catch (error) {
      throw error instanceof InputError ? error.at({ flag: `--${name} ${text}` }) : error;
    }
  });
}

/** "15 arcsec" or "15 arcsec,12 arcsec,30 deg": major and minor FWHM, position angle. */
export function flagBeam(name: string, text: string): Beam {
  const parts = text.split(',');
  if (parts.length !== 1 && parts.length !== 3) {
    throw new InputError('expected one FWHM such as "15 arcsec", or major, minor and angle such as "15 arcsec,12 arcsec,30 deg"', { flag: `--${name} ${text}` });
  }
  const majorArcsec = flagQuantity(name, parts[0], 'arcsec');
  const minorArcsec = parts.length === 1 ? majorArcsec : flagQuantity(name, parts[1], 'arcsec');
  if (!(minorArcsec > 0 && majorArcsec >= minorArcsec)) throw new InputError('the minor axis must be above 0 and no wider than the major one', { flag: `--${name} ${text}` });
  return { majorArcsec, minorArcsec, angle: parts.length === 1 ? 0 : flagQuantity(name, parts[2], 'rad') };
}

/** How the galaxy lies, from a scene or from the flags; and the radius of its volume where a scene says it. */
export function orientationOf(flags: MeasureFlags): DiscOrientation & { readonly radiusKpc?: number } {
  if (flags.galaxy !== undefined) {
    const other = (['inclination', 'positionAngle', 'centre', 'distance'] as const).find((name) => flags[name] !== undefined);
    if (other) throw new InputError(`--galaxy says how the galaxy lies: leave --${other === 'positionAngle' ? 'position-angle' : other} out`, { flag: `--galaxy ${flags.galaxy}` });
    const { galaxy } = loadScene(flags.galaxy, []).scene;
    return { ...galaxy, radiusKpc: galaxy.volume.radiusKpc };
  }
  const need = (name: string, text: string | undefined, example: string): string => {
    if (text === undefined) throw new InputError(`how the galaxy lies is not known: give --galaxy SCENE, or --${name} "${example}"`, { flag: `--${name}` });
    return text;
  };
  const inclination = flagQuantity('inclination', need('inclination', flags.inclination, '40 deg'), 'rad');
  if (!(inclination >= 0 && inclination <= Math.PI)) throw new InputError('expected 0 to 180 deg', { flag: `--inclination ${flags.inclination}` });
  const distanceKpc = flagQuantity('distance', need('distance', flags.distance, '10 Mpc'), 'kpc');
  if (!(distanceKpc > 0)) throw new InputError('expected a distance above 0', { flag: `--distance ${flags.distance}` });
  const centre = flags.centre === undefined ? undefined : flagList('centre', flags.centre, 'deg');
  if (centre && !(centre.length === 2 && centre[0] >= 0 && centre[0] <= 360 && Math.abs(centre[1]) <= 90)) {
    throw new InputError('expected right ascension and declination, such as "150 deg,20 deg"', { flag: `--centre ${flags.centre}` });
  }
  return {
    inclination,
    positionAngle: flagQuantity('position-angle', need('position-angle', flags.positionAngle, '25 deg'), 'rad'),
    distanceKpc,
    ...(centre && { centre: { raDeg: centre[0], decDeg: centre[1] } }),
  };
}

/** The scene whose layers are asked for. */
export function originScene({ galaxy }: MeasureFlags): Scene {
  if (galaxy === undefined) throw new InputError('the layers seen are those of a scene: give --galaxy SCENE', { flag: '--origin' });
  return loadScene(galaxy, []).scene;
}

/** The laws to fit to sectors and integrated light. */
export function lawsOf({ sums }: MeasureFlags): typeof laws {
  return sums ? [...laws, ...sumsOfTwo] : laws;
}

/** One number, or a list of them. */
export function oneOrMore(values: number[]): number | number[] {
  return values.length === 1 ? values[0] : values;
}

/** Three depths: first, last and step. */
export function depthRange(text: string): { firstDepth: number; lastDepth: number; step: number } {
  const values = flagList('depths', text, 'rad/m^2');
  if (values.length !== 3) throw new InputError('expected first depth, last depth and step, such as "-500 rad/m^2,500 rad/m^2,5 rad/m^2"', { flag: `--depths ${text}` });
  return { firstDepth: values[0], lastDepth: values[1], step: values[2] };
}
