import { InputError } from './input-error.ts';
import type { Unit } from './unit.ts';
import { canonicalUnitText, convertUnit, parseUnit, sameDimensions } from './unit.ts';

/** A number with the text of the unit it is in. */
export interface Quantity {
  readonly value: number;
  readonly unit: string;
}

const LONGEST = 200;
const NUMBER = /^([+-]?(?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)\s*(.*)$/su;

/**
 * Reads a quantity such as "2 kpc" and returns its number in `targetUnit`; where `targetUnit` is ''
 * the text must be a bare number. Throws InputError, without a place, that says what was given and
 * what is allowed.
 */
export function parseQuantity(text: string, targetUnit: string): number {
  const { value, unitText } = splitQuantity(text, targetUnit);
  const target = parseUnit(targetUnit);
  if (targetUnit === '') {
    if (unitText !== '') throw new InputError(`"${text}" has a unit, but a plain number is wanted`);
    return value;
  }
  if (unitText === '') throw new InputError(`"${text}" has no unit: ${wanted(targetUnit)}`);
  const unit = parseUnit(unitText);
  if (!sameDimensions(unit, target)) {
    throw new InputError(`"${text}" is ${describeUnit(unitText)}: ${wanted(targetUnit)}`);
  }
  return finite(convertUnit(value, unit, target), text);
}

/**
 * Reads a quantity of any dimension (or a bare number) into the unit that formulas written inside
 * a scene see: kpc, uG, cm^-3, rad, Hz, K, Myr and their products; see `canonicalUnitText`.
 * Throws InputError without a place.
 */
export function canonicalQuantity(text: string): Quantity {
  const { value, unitText } = splitQuantity(text, undefined);
  const unit = parseUnit(unitText);
  const canonical = canonicalUnitText(unit);
  return { value: finite(convertUnit(value, unit, parseUnit(canonical)), text), unit: canonical };
}

/** The number of a quantity in another unit of the same dimensions. Throws InputError if they differ. */
export function convertQuantity(value: number, from: string, to: string): number {
  if (from === to) return value;
  const [source, target] = [parseUnit(from), parseUnit(to)];
  if (!sameDimensions(source, target)) {
    throw new InputError(`${describeUnit(from)} in "${from}" cannot be said in "${to}"`);
  }
  return convertUnit(value, source, target);
}

/**
 * A quantity as text that `parseQuantity` reads back: at most 12 significant digits, then the unit.
 * With `shownUnit` (of the same dimensions) the number is converted first.
 */
export function formatQuantity(value: number, unit: string, shownUnit = unit): string {
  const shown = Number(convertQuantity(value, unit, shownUnit).toPrecision(12));
  return shownUnit === '' ? `${shown}` : `${shown} ${shownUnit}`;
}

/** Unit text for screens and figures: µG and µJy in place of uG and uJy. */
export function displayUnit(unit: string): string {
  return unit.replace(/\bu(G|Jy)\b/g, '\u00b5$1');
}

/** What a unit measures, with an article: "a length", "a magnetic field", "a plain number". */
export function describeUnit(unit: string): string {
  const name = dimensionNames.get(dimensionKey(parseUnit(unit)));
  return name ?? `in ${unit}`;
}

/** The end of a message about a wrong quantity: what is wanted and an example. */
export function wanted(unit: string): string {
  if (unit === '') return 'a plain number is wanted';
  const name = dimensionNames.get(dimensionKey(parseUnit(unit)));
  return `${name ?? 'a quantity'} is wanted, such as "2 ${unit}"`;
}

function splitQuantity(text: string, targetUnit: string | undefined): { value: number; unitText: string } {
  if (text.length > LONGEST) throw new InputError(`a text of ${text.length} characters is no quantity`);
  const trimmed = text.trim();
  const match = NUMBER.exec(trimmed);
  if (!match) {
    if (/^[+-]?\.?(nan|inf|infinity)\b/i.test(trimmed)) throw new InputError(`"${text}" is not a finite number`);
    const tail = targetUnit === undefined ? 'a quantity is wanted, such as "2 kpc"' : wanted(targetUnit);
    throw new InputError(`${JSON.stringify(text)} does not begin with a number: ${tail}`);
  }
  return { value: finite(Number(match[1]), text), unitText: match[2] };
}

function finite(value: number, text: string): number {
  if (!Number.isFinite(value)) throw new InputError(`"${text}" is too large for a number`);
  return value;
}

function dimensionKey(unit: Unit): string {
  return [...unit.dimensions].map(([dimension, power]) => `${dimension}${power}`).sort().join(' ');
}

const dimensionNames: ReadonlyMap<string, string> = new Map(
  (
    [
      ['', 'a plain number'],
      ['kpc', 'a length'],
      ['deg', 'an angle'],
      ['sr', 'a solid angle'],
      ['Myr', 'a time'],
      ['GHz', 'a frequency'],
      ['uG', 'a magnetic field'],
      ['uG kpc', 'a vector potential'],
      ['cm^-3', 'a number density'],
      ['rad/m^2', 'a Faraday depth'],
      ['deg/kpc', 'an angle per length'],
      ['km/s', 'a speed'],
      ['km/s/kpc', 'an angular speed'],
      ['Jy', 'a flux density'],
      ['Jy/beam', 'a brightness per beam'],
      ['Jy/sr', 'a surface brightness'],
      ['K', 'a temperature'],
    ] as const
  ).map(([unit, name]) => [dimensionKey(parseUnit(unit)), name]),
);
