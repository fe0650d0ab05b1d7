import { describe, expect, it } from 'vitest';
import { colourAt, paletteBytes } from '../../src/figure/palette.ts';
import type { Rgb } from '../../src/figure/palette.ts';
import { darkTheme, hypothesisStyle, lightTheme, overlayInk } from '../../src/figure/theme.ts';

/** sRGB 0–255 → linear (IEC 61966-2-1). */
function linear(rgb: readonly number[]): number[] {
  return rgb.map((c) => (c / 255 <= 0.04045 ? c / 255 / 12.92 : ((c / 255 + 0.055) / 1.055) ** 2.4));
}

/** Linear sRGB → CIELAB, D65 (CIE 1976). */
function lab([r, g, b]: readonly number[]): number[] {
  const f = (t: number): number => (t > 216 / 24389 ? Math.cbrt(t) : ((24389 / 27) * t + 16) / 116);
  const x = f((0.4124564 * r + 0.3575761 * g + 0.1804375 * b) / 0.95047);
  const y = f(0.2126729 * r + 0.7151522 * g + 0.072175 * b);
  const z = f((0.0193339 * r + 0.119192 * g + 0.9503041 * b) / 1.08883);
  return [116 * y - 16, 500 * (x - y), 200 * (y - z)];
}

const labOf = (rgb: Rgb): number[] => lab(linear(rgb));
const hex = (text: string): number[] => [1, 3, 5].map((k) => parseInt(text.slice(k, k + 2), 16));
const distance = (a: readonly number[], b: readonly number[]): number => Math.hypot(...a.map((x, k) => x - b[k]));
const steps = Array.from({ length: 101 }, (_, k) => k / 100);

/** Machado, Oliveira & Fernandes 2009, severity 1.0, on linear sRGB; from memory. */
const DEFICIENCIES = {
  protan: [0.152286, 1.052583, -0.204868, 0.114503, 0.786281, 0.099216, -0.003882, -0.048116, 1.051998],
  deutan: [0.367322, 0.860646, -0.227968, 0.280085, 0.672501, 0.047413, -0.01182, 0.04294, 0.968881],
};

describe('colour maps', () => {
  it('cividis ends where it was published to end', () => {
    // Nunez et al. 2018: (0, 32, 76) to (255, 233, 69), from memory; the fit used is good to a few per cent.
    expect(distance(colourAt('intensity', 0), [0, 32, 76])).toBeLessThan(8);
    expect(distance(colourAt('intensity', 1), [255, 233, 69])).toBeLessThan(8);
    expect(colourAt('intensity', -3)).toEqual(colourAt('intensity', 0));
    expect(colourAt('intensity', 7)).toEqual(colourAt('intensity', 1));
  });

  it('cividis grows lighter all the way, at an even pace', () => {
    const lightness = steps.map((t) => labOf(colourAt('intensity', t))[0]);
    const rises = lightness.slice(1).map((value, k) => value - lightness[k]);
    expect(Math.min(...rises)).toBeGreaterThan(0);
    // 0.8 a step on average; one sRGB unit of rounding is about 0.4.
    expect(Math.max(...rises)).toBeLessThan(1.8);
  });

  it('signed quantities are neutral at zero, purple below, orange above, equally light at the same size', () => {
    const [, a, b] = labOf(colourAt('signed', 0.5));
    expect(Math.hypot(a, b)).toBeLessThan(4); // below what is seen as a hue on paper
    const [purple, orange] = [colourAt('signed', 0.2), colourAt('signed', 0.8)];
    expect(purple[2]).toBeGreaterThan(purple[1]);
    expect(orange[0]).toBeGreaterThan(orange[2]);
    for (const t of steps) {
      expect(Math.abs(labOf(colourAt('signed', t))[0] - labOf(colourAt('signed', 1 - t))[0])).toBeLessThan(25);
    }
  });

  it('angles keep one lightness, come round, and tell a quarter turn apart', () => {
    const colours = steps.map((t) => labOf(colourAt('angle', t)));
    // Rounding to 8 bits moves the lightness by less than 0.5.
    for (const [lightness] of colours) expect(Math.abs(lightness - 70)).toBeLessThan(0.5);
    expect(colourAt('angle', 0)).toEqual(colourAt('angle', 1));
    expect(colourAt('angle', 0.3)).toEqual(colourAt('angle', -0.7));
    // Opposite hues are two chromas (38) apart.
    expect(distance(colours[0], colours[50])).toBeGreaterThan(70);
  });

  it('keeps entry 0 of the palette for blanks and puts zero in the middle', () => {
    const bytes = paletteBytes('signed');
    expect(bytes.length).toBe(768);
    expect([...bytes.subarray(3 * 128, 3 * 129)]).toEqual([...colourAt('signed', 0.5)]);
    expect([...bytes.subarray(3, 6)]).toEqual([...colourAt('signed', 0)]);
    expect([...bytes.subarray(765)]).toEqual([...colourAt('signed', 1)]);
  });
});

describe('colours of hypotheses', () => {
  const colours = Array.from({ length: 7 }, (_, k) => hypothesisStyle(k, lightTheme).colour);

  it('stay apart with and without colour-vision deficiency', () => {
    // 20 is ten times a just noticeable difference; the palette of Okabe & Ito (2008, from memory) has 18.
    const views = [
      colours.map((colour) => lab(linear(hex(colour)))),
      ...Object.values(DEFICIENCIES).map((matrix) =>
        colours.map((colour) => {
          const from = linear(hex(colour));
          return lab([0, 1, 2].map((row) => Math.max(0, from[0] * matrix[3 * row] + from[1] * matrix[3 * row + 1] + from[2] * matrix[3 * row + 2])));
        }),
      ),
    ];
    for (const view of views) {
      for (let a = 0; a < 7; a++) for (let b = 0; b < a; b++) expect(distance(view[a], view[b])).toBeGreaterThan(20);
    }
  });

  it('stand 3:1 against both grounds, and words 4.5:1', () => {
    // Contrast as in WCAG 2.2, 1.4.3 and 1.4.11.
    const luminance = (text: string): number => linear(hex(text)).reduce((sum, c, k) => sum + c * [0.2126, 0.7152, 0.0722][k], 0);
    const contrast = (a: string, b: string): number => {
      const [low, high] = [luminance(a), luminance(b)].sort((x, y) => x - y);
      return (high + 0.05) / (low + 0.05);
    };
    for (const theme of [lightTheme, darkTheme]) {
      for (let k = 0; k < 7; k++) expect(contrast(hypothesisStyle(k, theme).colour, theme.gap)).toBeGreaterThan(3);
      for (const words of [theme.ink, theme.soft]) expect(contrast(words, theme.gap)).toBeGreaterThan(4.5);
    }
  });

  it('differ by dash too, and the eighth differs from the first', () => {
    const styles = Array.from({ length: 14 }, (_, k) => hypothesisStyle(k, lightTheme));
    expect(new Set(styles.slice(0, 7).map((style) => style.dash)).size).toBe(7);
    expect(new Set(styles.map((style) => `${style.colour} ${style.dash}`)).size).toBe(14);
  });

  it('draws light over intensities and dark over the rest', () => {
    expect(overlayInk('intensity').line).not.toBe(overlayInk('signed').line);
    expect(overlayInk('angle')).toEqual(overlayInk('signed'));
  });
});
