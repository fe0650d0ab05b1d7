import { interpolateCividis, interpolatePuOr } from 'd3-scale-chromatic';

/** What a map's colours mean: from nothing to much, signed about zero, or an angle that comes round. */
export type ColourKind = 'intensity' | 'signed' | 'angle';

export type Rgb = readonly [number, number, number];

/** Lightness and chroma of the cyclic map: the largest chroma that stays inside sRGB at every hue. */
const CYCLIC_LIGHTNESS = 70;
const CYCLIC_CHROMA = 38;

/**
 * The colour at `t` in [0, 1], sRGB 0 to 255. Intensities: cividis (Nunez et al. 2018). Signed: purple
 * to orange, pale at 1/2 (Brewer 2003's PuOr). Angles: a circle of constant lightness in CIELAB.
 */
export function colourAt(kind: ColourKind, t: number): Rgb {
  if (kind === 'angle') return cyclicColour(t);
  const inside = Math.min(1, Math.max(0, t));
  return parseRgb(kind === 'intensity' ? interpolateCividis(inside) : interpolatePuOr(inside));
}

/** The 255 colours of a map's levels 1 to 255 as PNG palette bytes; entry 0 is kept for blank pixels. */
export function paletteBytes(kind: ColourKind): Uint8Array {
  const bytes = new Uint8Array(256 * 3);
  const steps = kind === 'angle' ? 255 : 254;
  for (let level = 1; level < 256; level++) bytes.set(colourAt(kind, (level - 1) / steps), level * 3);
  return bytes;
}

/** CIELAB (L, C, h) of the turn `t` → sRGB (CIE 1976, D65; IEC 61966-2-1). */
function cyclicColour(t: number): Rgb {
  const hue = 2 * Math.PI * (t - Math.floor(t));
  const y = (CYCLIC_LIGHTNESS + 16) / 116;
  const x = y + (CYCLIC_CHROMA * Math.cos(hue)) / 500;
  const z = y - (CYCLIC_CHROMA * Math.sin(hue)) / 200;
  const [X, Y, Z] = [0.95047 * fromLab(x), fromLab(y), 1.08883 * fromLab(z)];
  return [
    toSrgb(3.2404542 * X - 1.5371385 * Y - 0.4985314 * Z),
    toSrgb(-0.969266 * X + 1.8760108 * Y + 0.041556 * Z),
    toSrgb(0.0556434 * X - 0.2040259 * Y + 1.0572252 * Z),
  ];
}

function fromLab(f: number): number {
  return f > 6 / 29 ? f ** 3 : ((116 * f - 16) * 27) / 24389;
}

function toSrgb(linear: number): number {
  const value = linear <= 0.0031308 ? 12.92 * linear : 1.055 * linear ** (1 / 2.4) - 0.055;
  return Math.round(255 * Math.min(1, Math.max(0, value)));
}

function parseRgb(text: string): Rgb {
  const [red, green, blue] = (text.match(/\d+/g) ?? []).map(Number);
  return [red, green, blue];
}
