import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { baseUnits } from '../../src/units/base-units.ts';
import { InputError } from '../../src/units/input-error.ts';
import { canonicalQuantity, convertQuantity, displayUnit, formatQuantity, parseQuantity } from '../../src/units/quantity.ts';
import { needPython, pythonJson } from '../support/tools.ts';

function messageOf(run: () => unknown): string {
  try {
    run();
  } catch (error) {
    if (error instanceof InputError) return error.message;
    throw error;
  }
  return 'no error';
}

describe('exact conversions (powers of ten and definitions)', () => {
  test.each([
    ['2 kpc', 'kpc', 2],
    ['50 pc', 'kpc', 0.05],
    ['10 Mpc', 'kpc', 10000],
    ['1.4 GHz', 'Hz', 1.4e9],
    ['0.35 GHz', 'Hz', 3.5e8],
    ['100 MHz', 'GHz', 0.1],
    ['10 uJy/beam', 'Jy/beam', 1e-5],
    ['10 \u00b5Jy/beam', 'Jy/beam', 1e-5],
    ['3 \u00b5G', 'uG', 3],
    ['3 \u03bcG', 'uG', 3],
    ['-0.5 mG', 'uG', -500],
    ['2000 nG', 'uG', 2],
    ['1 MJy/sr', 'Jy/sr', 1e6],
    ['4 arcsec', 'arcsec', 4],
    ['1.5 arcmin', 'arcsec', 90],
    ['90 arcsec', 'arcmin', 1.5],
    ['90 deg', 'rad', Math.PI / 2],
    ['180 deg', 'rad', Math.PI],
    ['12 rad/m^2', 'rad m^-2', 12],
    ['12 rad m^-2', 'rad/m^2', 12],
    ['1e-5 cm^-3', 'cm^-3', 1e-5],
    ['1000000 m^-3', 'cm^-3', 1],
    ['20 uG kpc^2', 'uG kpc^2', 20],
    ['20 uG*kpc*kpc', 'uG kpc^2', 20],
    ['2 Gyr', 'Myr', 2000],
    ['+.5e1kpc', 'kpc', 5],
    ['7', '', 7],
    [' -7.25 ', '', -7.25],
  ])('%s in %s is %d', (text, unit, value) => expect(parseQuantity(text, unit)).toBe(value));
});

test('conversions agree with astropy.units', (context) => {
  needPython(context, 'astropy');
  const pairs = [
    ['km/s/kpc', 'Myr^-1'], ['deg/kpc', 'rad/kpc'], ['sr', 'arcsec^2'], ['MJy/sr', 'Jy/arcsec^2'], ['m', 'kpc'],
    ['cm^-3', 'pc^-3'], ['rad/m^2', 'rad/cm^2'], ['km/s', 'kpc/Myr'], ['uG kpc^2', 'mG pc^2'], ['Gyr', 's'], ['deg^2', 'sr'],
  ] as const;
  const theirs = pythonJson(
    `
import json, sys, astropy.units as u
g = u.def_unit('gauss_', 1e-4*u.T)
names = {'uG': 1e-6*g, 'mG': 1e-3*g}
def unit(text):
    parts = []
    for p in text.replace('/', ' /').split():
        s = -1 if p[0] == '/' else 1
        w, _, n = p.lstrip('/').partition('^')
        parts.append((names[w] if w in names else u.Unit(w)) ** (s*int(n or 1)))
    out = parts[0]
    for p in parts[1:]: out = out * p
    return out
print(json.dumps([(1*unit(a)).to(unit(b)).value for a, b in json.loads(sys.argv[1])]))`,
    [JSON.stringify(pairs)],
  ) as number[];
  // Products of a few rounded factors on both sides: some 1e-15.
  pairs.forEach(([from, to], k) => expect(Math.abs(convertQuantity(1, from, to) / theirs[k] - 1)).toBeLessThan(1e-14));
});

describe('what is refused, word for word', () => {
  const unitList = [...baseUnits.keys()].join(', ');
  test.each([
    ['2', 'kpc', '"2" has no unit: a length is wanted, such as "2 kpc"'],
    ['2 kpcs', 'kpc', `unknown unit "kpcs" (did you mean "kpc"?); units are ${unitList}`],
    ['2 uG', 'kpc', '"2 uG" is a magnetic field: a length is wanted, such as "2 kpc"'],
    ['2 GHz', 'deg', '"2 GHz" is a frequency: an angle is wanted, such as "2 deg"'],
    ['2 Jy', 'Jy/beam', '"2 Jy" is a flux density: a brightness per beam is wanted, such as "2 Jy/beam"'],
    ['2 s^-1', 'GHz', '"2 s^-1" is an angular speed: a frequency is wanted, such as "2 GHz"'],
    ['2 kpc^4', 'kpc', '"2 kpc^4" is in kpc^4: a length is wanted, such as "2 kpc"'],
    ['2 kpc', '', '"2 kpc" has a unit, but a plain number is wanted'],
    ['NaN kpc', 'kpc', '"NaN kpc" is not a finite number'],
    ['-Infinity kpc', 'kpc', '"-Infinity kpc" is not a finite number'],
    ['.inf kpc', 'kpc', '".inf kpc" is not a finite number'],
    ['1e999 kpc', 'kpc', '"1e999 kpc" is too large for a number'],
    ['1e308 Mpc', 'pc', '"1e308 Mpc" is too large for a number'],
    ['two kpc', 'kpc', '"two kpc" does not begin with a number: a length is wanted, such as "2 kpc"'],
    ['', 'kpc', '"" does not begin with a number: a length is wanted, such as "2 kpc"'],
    ['1,5 kpc', 'kpc', '",5 kpc" is not a unit: words with whole powers, such as "rad m^-2" or "km/s/kpc"'],
    ['0x10 kpc', 'kpc', '"x10 kpc" is not a unit: words with whole powers, such as "rad m^-2" or "km/s/kpc"'],
    ['2 kpc/', 'kpc', '"kpc/" is not a unit: words with whole powers, such as "rad m^-2" or "km/s/kpc"'],
    ['2 kpc^0', 'kpc', 'the unit "kpc^0" has the power 0; allowed are 1 to 12 and -1 to -12'],
    ['2 kpc^99', 'kpc', 'the unit "kpc^99" has the power 99; allowed are 1 to 12 and -1 to -12'],
    [`2 ${'k'.repeat(300)}`, 'kpc', 'a text of 302 characters is no quantity'],
  ])('%s as %s', (text, unit, message) => expect(messageOf(() => parseQuantity(text, unit))).toBe(message));

  test('a unit too large to compute with', () => {
    expect(messageOf(() => parseQuantity('1 Mpc^12 Mpc^12', 'kpc'))).toContain('too large or too small');
  });
});

describe('canonical quantities of inline formulas', () => {
  test.each([
    ['20 uG kpc^2', 20, 'uG kpc^2'],
    ['300 pc', 0.3, 'kpc'],
    ['0.02 cm^-3', 0.02, 'cm^-3'],
    ['2000000 m^-3', 2, 'cm^-3'],
    ['3 cm^-6 pc', 0.003, 'cm^-6 kpc'],
    ['2 mG', 2000, 'uG'],
    ['90 deg', Math.PI / 2, 'rad'],
    ['1.4 GHz', 1.4e9, 'Hz'],
    ['1 Gyr', 1000, 'Myr'],
    ['10000 K', 10000, 'K'],
    ['5', 5, ''],
  ])('%s is %d %s', (text, value, unit) => expect(canonicalQuantity(text)).toEqual({ value, unit }));

  test('a speed becomes kpc/Myr', () => {
    const { value, unit } = canonicalQuantity('1 km/s');
    expect(unit).toBe('kpc Myr^-1');
    // 1 km/s = 1.0227 pc/Myr (from memory, 5 digits), hence 1e-4.
    expect(Math.abs(value / 1.0227e-3 - 1)).toBeLessThan(1e-4);
  });
});

test('what is formatted is read back, for every unit and product', () => {
  const units = fc.array(fc.tuple(fc.constantFrom(...baseUnits.keys()), fc.integer({ min: -3, max: 3 }).filter((n) => n !== 0)), { minLength: 1, maxLength: 3 });
  fc.assert(
    fc.property(fc.double({ min: -1e12, max: 1e12, noNaN: true }), units, (value, factors) => {
      const unit = factors.map(([word, power]) => `${word}^${power}`).join(' ');
      const again = parseQuantity(formatQuantity(value, unit), unit);
      // 12 significant digits are written.
      expect(Math.abs(again - value)).toBeLessThanOrEqual(1e-11 * Math.abs(value));
    }),
    { seed: 1, numRuns: 300 },
  );
});

test('converting there and back changes nothing but the last digit', () => {
  const groups = [['kpc', 'pc', 'Mpc', 'm', 'cm', 'km'], ['deg', 'rad', 'arcsec', 'arcmin'], ['Hz', 'kHz', 'MHz', 'GHz'], ['uG', 'nG', 'mG']];
  for (const group of groups) {
    for (const from of group) {
      for (const to of group) {
        const back = convertQuantity(convertQuantity(0.7, from, to), to, from);
        expect(Math.abs(back / 0.7 - 1), `${from} ${to}`).toBeLessThan(4e-16 * 3);
      }
    }
  }
});

test('formatting converts to the shown unit, and screens show the micro sign', () => {
  expect(formatQuantity(Math.PI / 2, 'rad', 'deg')).toBe('90 deg');
  expect(formatQuantity(0.1 + 0.2, '')).toBe('0.3');
  expect(formatQuantity(1.4e9, 'Hz', 'GHz')).toBe('1.4 GHz');
  expect(displayUnit('uG kpc')).toBe('\u00b5G kpc');
  expect(displayUnit('uJy/beam')).toBe('\u00b5Jy/beam');
  expect(messageOf(() => convertQuantity(1, 'kpc', 'uG'))).toBe('a length in "kpc" cannot be said in "uG"');
});

test('any text is read or refused with words, never with a crash', () => {
  fc.assert(
    fc.property(fc.string({ maxLength: 40 }), fc.constantFrom('kpc', 'uG', '', 'rad/m^2'), (text, unit) => {
      const message = messageOf(() => {
        const value = parseQuantity(text, unit);
        if (!Number.isFinite(value)) throw new Error(`${text} became ${value}`);
      });
      expect(message).not.toBe('');
    }),
    { seed: 2, numRuns: 2000 },
  );
});
