import { describe, expect, test } from 'vitest';
import * as constants from '../../src/units/constants.ts';
import { needPython, pythonJson } from '../support/tools.ts';

const { elementaryCharge, electronMass, speedOfLight, parsec, faradayConstant } = constants;
const gev = 1e9 * elementaryCharge.value;
const gauss = 1e-4;
const chargeGaussian = constants.elementaryChargeGaussian.value;
const massGram = electronMass.value * 1e3;
const lightCm = speedOfLight.value * 100;
const gamma = gev / (electronMass.value * speedOfLight.value ** 2);
const thomsonCm2 = ((8 * Math.PI) / 3) * (chargeGaussian ** 2 / (massGram * lightCm ** 2)) ** 2;

/** E/P for the electron that shines at 1 GHz in 1 uG, Gyr: P = 2 sigma_T c gamma^2 B^2/8pi. */
function coolingTimeGyr(): number {
  const gamma2 = 1e9 / (1.5 * constants.gyrofrequencyPerMicrogauss.value);
  const power = 2 * thomsonCm2 * lightCm * gamma2 * (1e-12 / (8 * Math.PI));
  return (Math.sqrt(gamma2) * massGram * lightCm ** 2) / power / (1e9 * constants.julianYear.value);
}

describe('section 1 of the check values (computed with CODATA 2018 and the IAU parsec; printed forms from memory)', () => {
  // Values are written with 9 digits there, so 1e-8 relative is what they can tell; where the row
  // has more digits (1.1, 1.1b) the tolerance is rounding of doubles.
  const rows: readonly (readonly [id: string, what: string, value: number, expected: number, relative: number])[] = [
    ['1.1', 'Faraday constant', faradayConstant.value, 0.8119011641650427, 1e-12],
    ['1.1b', 'Faraday constant in SI', constants.faradayConstantSI.value, 2.63119247790184e-13, 1e-12],
    ['1.2', 'RM of 0.03 cm^-3, 3 uG, 1 kpc', faradayConstant.value * 0.03 * 3 * 1000, 73.0711048, 1e-8],
    ['1.3', 'gyrofrequency at 1 uG', constants.gyrofrequencyPerMicrogauss.value, 2.79924899, 1e-8],
    ['1.4', 'critical frequency at 1 GeV, 1 uG, MHz', 1.5 * gamma ** 2 * constants.gyrofrequencyPerMicrogauss.value * 1e-6, 16.0802491, 1e-8],
    ['1.5', 'c1 = 3e/(4 pi m^3 c^5)', (3 * chargeGaussian) / (4 * Math.PI * massGram ** 3 * lightCm ** 5), 6.26429189e18, 1e-8],
    ['1.6', 'c3 = sqrt3 e^3/(4 pi m c^2)', (Math.sqrt(3) * chargeGaussian ** 3) / (4 * Math.PI * massGram * lightCm ** 2), 1.86557903e-23, 1e-8],
    // r_L = E/(e B c); 1e-5 as the row says: p c = E only for the ultra-relativistic electron.
    ['1.7', 'Larmor radius at 1 GeV, 1 uG, pc', gev / (elementaryCharge.value * 1e-6 * gauss * speedOfLight.value) / parsec.value, 1.08100761e-6, 1e-5],
    [
      '1.8', 'K of 1 Jy/beam, 1 GHz, 1 arcsec beam',
      constants.kelvinPerJanskySteradian.value / 1e18 / (constants.beamSolidAngleFactor.value * (Math.PI / 648000) ** 2),
      1222120.34, 1e-8,
    ],
    ['1.9', 'K of 1 MJy/sr at 1 GHz', (constants.kelvinPerJanskySteradian.value * 1e6) / 1e18, 32.5482863, 1e-8],
    ['1.10', 'beam factor pi/(4 ln 2)', constants.beamSolidAngleFactor.value, 1.13309004, 1e-8],
    ['1.12', 'cooling time, Gyr', coolingTimeGyr(), 1.05925324, 1e-8],
  ];
  test.each(rows)('%s %s', (_, __, value, expected, relative) => {
    expect(Math.abs(value / expected - 1)).toBeLessThan(relative);
  });

  test('the constant of the trade, 0.812, is this one rounded', () => {
    expect(Number(faradayConstant.value.toFixed(3))).toBe(0.812);
  });
});

test('fundamental constants are those of astropy (CODATA 2018, IAU 2012/2015)', (context) => {
  needPython(context, 'astropy');
  const theirs = pythonJson(`
import json
from astropy.constants import codata2018 as c, iau2015 as i
import astropy.units as u
print(json.dumps([x.si.value for x in (c.e, c.m_e, c.c, c.eps0, c.k_B, c.h, i.pc)] + [(1*u.Jy).si.value, (1*u.yr).si.value]))`) as number[];
  const ours = [
    elementaryCharge, electronMass, speedOfLight, constants.vacuumPermittivity, constants.boltzmannConstant,
    constants.planckConstant, parsec, constants.jansky, constants.julianYear,
  ];
  expect(theirs).toHaveLength(ours.length);
  // All but the parsec are decimal definitions; the parsec rests on pi and may differ by a rounding.
  ours.forEach(({ value }, k) => expect(Math.abs(value / theirs[k] - 1)).toBeLessThan(4e-16));
});

test('a constant without source, unit or finite value cannot be made', () => {
  expect(() => constants.constant(1, 'm', '')).toThrow('no source');
  expect(() => constants.constant(1, 'm', '  ')).toThrow('no source');
  expect(() => constants.constant(1, '', 'Author 2000')).toThrow('no unit');
  expect(() => constants.constant(Number.NaN, 'm', 'Author 2000')).toThrow('NaN');
  expect(constants.constant(2, 'm', 'Author 2000')).toEqual({ value: 2, unit: 'm', source: 'Author 2000' });
});
