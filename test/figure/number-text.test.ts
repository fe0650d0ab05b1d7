import { describe, expect, it } from 'vitest';
import { fixedText, joinUnit, numberText, quantityText, shownUnit, unitText, withError, withInterval } from '../../src/figure/number-text.ts';
import { roundLength, tidyTicks } from '../../src/figure/ticks.ts';

describe('numbers with errors', () => {
  it.each([
    // The Review of Particle Physics' own examples (introduction, "Rounding"; from memory).
    [0.827, 0.119, '0.83 ± 0.12'],
    [0.827, 0.367, '0.8 ± 0.4'],
    // The same rule by hand: 355–949 one digit, 950 and up rounded to 1000.
    [1.2345, 0.0354, '1.234 ± 0.035'],
    [1.2345, 0.0355, '1.23 ± 0.04'],
    [1.2345, 0.0949, '1.23 ± 0.09'],
    [1.2345, 0.0951, '1.23 ± 0.10'],
    [98214, 1234, '98200 ± 1200'],
    [-3.14159, 0.2, '−3.14 ± 0.20'],
    [0, 0.5, '0.0 ± 0.5'],
    [1.234e-5, 2e-7, '(1.234 ± 0.020)×10⁻⁵'],
    [123456, 7000, '(1.23 ± 0.07)×10⁵'],
  ])('%d ± %d', (value, error, text) => expect(withError(value, error)).toBe(text));

  it('puts units where they belong', () => {
    expect(withError(2.3456, 0.1234, 'uG')).toBe('2.35 ± 0.12 µG');
    expect(withError(38.21, 0.62, 'deg')).toBe('38.2° ± 0.6°');
    expect(withInterval(38.21, 0.62, 0.87, 'deg')).toBe('38.2° +0.9° −0.6°');
    expect(withInterval(2.3, 0.12, 0.12, 'kpc')).toBe('2.30 ± 0.12 kpc');
    expect(withError(1.2e-5, 1e-6, 'cm^-3')).toBe('(1.20 ± 0.10)×10⁻⁵ cm⁻³');
  });

  it('says the value alone without a usable error, and blank for no value', () => {
    for (const error of [undefined, NaN, 0, -1, Infinity]) expect(withError(2.34567, error, 'uG')).toBe('2.346 µG');
    expect(withInterval(2, NaN, 1, 'uG')).toBe('2.000 µG');
    expect(withError(NaN, 1, 'uG')).toBe('—');
  });
});

describe('numbers and units', () => {
  it('keeps significant digits through rounding up and small sizes', () => {
    expect([0, 9.996, 0.012345, 98214, 99999, 1e5, 0.00099, -42].map((x) => numberText(x))).toEqual([
      '0', '10.0', '0.0123', '98200', '1.00×10⁵', '1.00×10⁵', '9.90×10⁻⁴', '−42.0',
    ]);
    expect(quantityText(15, 'arcsec', 2)).toBe('15″');
    expect(fixedText(-0.001, 1)).toBe('0.0');
  });

  it('shows units as printed', () => {
    expect(['rad m^-2', 'rad/m^2', 'rad/m2', 'cm-3', 'uG', 'uJy/beam', 'cm^-3', 'deg', 'arcsec', '1', 'GHz', 'uG kpc'].map(unitText)).toEqual([
      'rad m⁻²', 'rad/m²', 'rad/m²', 'cm⁻³', 'µG', 'µJy/beam', 'cm⁻³', '°', '″', '', 'GHz', 'µG kpc',
    ]);
    expect(joinUnit('5', 'kpc')).toBe('5 kpc');
  });

  it('chooses a prefix that suits the largest value', () => {
    const near = (shown: { readonly factor: number; readonly unit: string }, factor: number, unit: string): void => {
      expect(shown.unit).toBe(unit);
      expect(Math.abs(shown.factor / factor - 1)).toBeLessThan(1e-14); // one division
    };
    near(shownUnit(4.5e-4, 'Jy/beam'), 1e6, 'µJy/beam');
    near(shownUnit(1e-3, 'Jy/beam'), 1e3, 'mJy/beam');
    near(shownUnit(2e4, 'Jy/sr'), 1e-3, 'kJy/sr');
    near(shownUnit(1e-12, 'Jy/beam'), 1e9, 'nJy/beam');
    near(shownUnit(0, 'Jy/beam'), 1, 'Jy/beam');
    near(shownUnit(50, 'rad m^-2'), 1, 'rad m⁻²');
    near(shownUnit(1, 'rad'), 180 / Math.PI, '°');
  });
});

describe('ticks', () => {
  it('are round, inside and alike in decimals', () => {
    expect(tidyTicks(-0.2, 1.1, 4).map((tick) => tick.label)).toEqual(['0.0', '0.5', '1.0']);
    expect(tidyTicks(-52, 52, 4).map((tick) => tick.label)).toEqual(['−40', '−20', '0', '20', '40']);
    expect(tidyTicks(0, 2.5e-7, 3).map((tick) => tick.label)).toEqual(['0', '1×10⁻⁷', '2×10⁻⁷']);
  });

  it('round a length down to 1, 2 or 5', () => {
    expect([7.3, 1, 0.99, 2.4, 49].map(roundLength)).toEqual([5, 1, 0.5, 2, 20]);
  });
});
