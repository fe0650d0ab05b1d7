import { baseUnits } from './base-units.ts';
import type { BaseUnit, Dimension } from './base-units.ts';
import { InputError, nearestHint } from './input-error.ts';

/** A unit word with its power, such as `kpc` to the power 2. */
interface Factor {
  readonly word: string;
  readonly base: BaseUnit;
  readonly power: number;
}

/** A unit that was read from text: a product of powers of unit words. */
export interface Unit {
  readonly factors: readonly Factor[];
  /** Powers of dimensions that are not zero. */
  readonly dimensions: ReadonlyMap<Dimension, number>;
  readonly mantissa: number;
  readonly exponent: number;
}

const MAX_POWER = 12;
const NAMES = [...baseUnits.keys()];
const parsed = new Map<string, Unit>();

/**
 * Reads unit text: words of `baseUnits` with whole powers, joined by space, `*` or `/`, such as
 * "uG kpc^2", "km/s/kpc", "rad m^-2"; '' is dimensionless. `/` divides by the next word only.
 * Both micro signs may stand for `u`. Throws InputError, without a place, naming the nearest unit.
 */
export function parseUnit(text: string): Unit {
  const known = parsed.get(text);
  if (known) return known;
  const unit = unitOf(readFactors(text), text);
  if (parsed.size < 1000) parsed.set(text, unit);
  return unit;
}

/** True where a number in one unit can be said in the other. */
export function sameDimensions(a: Unit, b: Unit): boolean {
  if (a.dimensions.size !== b.dimensions.size) return false;
  return [...a.dimensions].every(([dimension, power]) => b.dimensions.get(dimension) === power);
}

/** The number of a quantity in unit `to`, given its number in unit `from` of the same dimensions. */
export function convertUnit(value: number, from: Unit, to: Unit): number {
  const ratio = from.mantissa / to.mantissa;
  const inverse = 1 / ratio;
  // Dividing by a whole number is correctly rounded; multiplying by its reciprocal is not.
  const scaled = ratio < 1 && Number.isInteger(inverse) ? value / inverse : value * ratio;
  const exponent = from.exponent - to.exponent;
  return exponent >= 0 ? scaled * Number(`1e${exponent}`) : scaled / Number(`1e${-exponent}`);
}

/**
 * The unit that formulas written inside a scene see: kpc, uG, cm^-3, rad, Hz, K, Myr, Jy, beam and
 * their products. Negative thirds of m or cm count as number density, cm^-3; other lengths are kpc.
 */
export function canonicalUnitText(unit: Unit): string {
  const powers = new Map<string, number>();
  const add = (word: string, power: number): void => {
    powers.set(word, (powers.get(word) ?? 0) + power);
  };
  const canonical: Readonly<Record<Dimension, string>> = {
    length: 'kpc', angle: 'rad', time: 'Myr', frequency: 'Hz',
    field: 'uG', flux: 'Jy', beam: 'beam', temperature: 'K',
  };
  for (const { word, base, power } of unit.factors) {
    const density = (word === 'm' || word === 'cm') && power < 0 && power % 3 === 0;
    add(density ? 'cm' : canonical[base.dimension], power * base.power);
  }
  const words = [...powers].filter(([, power]) => power !== 0);
  return words.map(([word, power]) => (power === 1 ? word : `${word}^${power}`)).join(' ');
}

/** Unit text with every angle in radians: the unit in which formulas see a declared parameter. */
export function radianUnitText(text: string): string {
  return text.replace(/\b(deg|arcmin|arcsec)\b/g, 'rad');
}

function readFactors(text: string): Factor[] {
  const plain = text.replace(/[\u00b5\u03bc]/g, 'u').trim();
  if (plain === '') return [];
  const factors: Factor[] = [];
  let sign = 1;
  for (const piece of plain.split(/(\s*[*/]\s*|\s+)/)) {
    const separator = piece.trim();
    if (separator === '' && piece !== '') continue;
    if (separator === '*') continue;
    if (separator === '/') {
      sign = -1;
      continue;
    }
    factors.push(readFactor(piece, sign, text));
    sign = 1;
  }
  return factors;
}

function readFactor(piece: string, sign: number, whole: string): Factor {
  const match = /^([A-Za-z]+)(?:\^\(?([+-]?\d{1,3})\)?)?$/.exec(piece);
  if (!match) {
    throw new InputError(`"${whole}" is not a unit: words with whole powers, such as "rad m^-2" or "km/s/kpc"`);
  }
  const [, word, powerText] = match;
  const base = baseUnits.get(word);
  if (!base) throw new InputError(`unknown unit "${word}"${nearestHint(word, NAMES)}; units are ${NAMES.join(', ')}`);
  const power = sign * Number(powerText ?? 1);
  if (power === 0 || Math.abs(power) > MAX_POWER) {
    throw new InputError(`the unit "${whole}" has the power ${power}; allowed are 1 to ${MAX_POWER} and -1 to -${MAX_POWER}`);
  }
  return { word, base, power };
}

function unitOf(factors: readonly Factor[], text: string): Unit {
  const dimensions = new Map<Dimension, number>();
  let mantissa = 1;
  let exponent = 0;
  for (const { base, power } of factors) {
    const total = (dimensions.get(base.dimension) ?? 0) + power * base.power;
    if (total === 0) dimensions.delete(base.dimension);
    else dimensions.set(base.dimension, total);
    mantissa *= base.mantissa ** power;
    exponent += base.exponent * power;
  }
  if (!Number.isFinite(mantissa) || mantissa === 0 || Math.abs(exponent) > 290) {
    throw new InputError(`the unit "${text}" is too large or too small to compute with`);
  }
  return { factors, dimensions, mantissa, exponent };
}
