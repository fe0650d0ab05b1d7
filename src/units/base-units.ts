import { parsec, julianYear } from './constants.ts';

/** What a unit measures. Frequency is kept apart from 1/time, so that Hz stays Hz. */
export type Dimension =
  | 'length'
  | 'angle'
  | 'time'
  | 'frequency'
  | 'field'
  | 'flux'
  | 'beam'
  | 'temperature';

/** One unit word: mantissa * 10^exponent times the base of its dimension, raised to `power`. */
export interface BaseUnit {
  readonly dimension: Dimension;
  /** 2 for sr = rad^2, else 1. */
  readonly power: number;
  /** Kept apart from the power of ten so that pc -> kpc or MHz -> Hz is correctly rounded. */
  readonly mantissa: number;
  readonly exponent: number;
}

const [parsecMantissa, parsecExponent] = [parsec.value / 1e16, 16];
const radianArcsec = 648000 / Math.PI;
const yearSeconds = julianYear.value;

function unit(dimension: Dimension, mantissa: number, exponent = 0, power = 1): BaseUnit {
  return { dimension, mantissa, exponent, power };
}

/** Every unit word of scenes, studies and models. The bases are m, arcsec, s, Hz, G and Jy. */
export const baseUnits: ReadonlyMap<string, BaseUnit> = new Map([
  ['kpc', unit('length', parsecMantissa, parsecExponent + 3)],
  ['pc', unit('length', parsecMantissa, parsecExponent)],
  ['Mpc', unit('length', parsecMantissa, parsecExponent + 6)],
  ['m', unit('length', 1)],
  ['cm', unit('length', 1, -2)],
  ['km', unit('length', 1, 3)],
  ['arcsec', unit('angle', 1)],
  ['arcmin', unit('angle', 60)],
  ['deg', unit('angle', 3600)],
  ['rad', unit('angle', radianArcsec)],
  ['sr', unit('angle', radianArcsec ** 2, 0, 2)],
  ['s', unit('time', 1)],
  ['Myr', unit('time', yearSeconds, 6)],
  ['Gyr', unit('time', yearSeconds, 9)],
  ['Hz', unit('frequency', 1)],
  ['kHz', unit('frequency', 1, 3)],
  ['MHz', unit('frequency', 1, 6)],
  ['GHz', unit('frequency', 1, 9)],
  ['G', unit('field', 1)],
  ['T', unit('field', 1, 4)],
  ['uG', unit('field', 1, -6)],
  ['nG', unit('field', 1, -9)],
  ['mG', unit('field', 1, -3)],
  ['Jy', unit('flux', 1)],
  ['mJy', unit('flux', 1, -3)],
  ['uJy', unit('flux', 1, -6)],
  ['MJy', unit('flux', 1, 6)],
  ['beam', unit('beam', 1)],
  ['K', unit('temperature', 1)],
]);
