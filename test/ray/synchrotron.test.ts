import { expect, test } from 'vitest';
import { intrinsicPolarization, brightnessPerKpc, faradayDepthPerKpc, synchrotronEmissivity, wavelengthSquared } from '../../src/ray/synchrotron.ts';
import { emissivity, intrinsicFraction } from '../reference/closed-forms.ts';
import { relativeError } from '../sky/compare.ts';

test.each(emissivity)('emissivity for p = %d', (p, expected) => {
  // C = 1e-6 cm^-3, B_⊥ = 5 uG. Rows are good to all digits; ours lose some in ln Γ.
  expect(relativeError(synchrotronEmissivity(p, 1.4e9) * 1e-6 * 5 ** ((p + 1) / 2), expected)).toBeLessThan(1e-11);
});

test('the check value of design/physics.md section 3', () => {
  expect(relativeError(synchrotronEmissivity(2.8, 1.4e9) * 1e-9 * 10 ** 1.9, 2.60573e-44)).toBeLessThan(2e-6);
});

test.each(intrinsicFraction)('intrinsic polarization for p = %d', (p, expected) => {
  expect(relativeError(intrinsicPolarization(p), expected)).toBeLessThan(1e-15);
});

test('emission falls with frequency as ν^-(p-1)/2', () => {
  for (const p of [2, 2.5, 3]) {
    const ratio = synchrotronEmissivity(p, 4.8e9) / synchrotronEmissivity(p, 1.2e9);
    expect(relativeError(ratio, 4 ** (-(p - 1) / 2))).toBeLessThan(1e-14);
  }
});

test('units: a kpc of path in Jy/sr, a wavelength, a Faraday depth', () => {
  // 1 kpc = 3.0856775814913673e21 cm, 1 Jy = 1e-23 erg s^-1 cm^-2 Hz^-1.
  expect(relativeError(brightnessPerKpc(2.6, 1e9), synchrotronEmissivity(2.6, 1e9) * 3.0856775814913673e44)).toBeLessThan(1e-14);
  expect(relativeError(wavelengthSquared(1e9), 0.299792458 ** 2)).toBeLessThan(1e-15);
  // Row 1.2: 0.03 cm^-3, +3 uG towards the observer, 1 kpc → 73.0711048 rad m^-2.
  expect(relativeError(0.03 * 3 * faradayDepthPerKpc, 73.07110477485384)).toBeLessThan(1e-12);
});
