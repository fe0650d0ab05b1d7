const MINUS = '−';
const SUPERSCRIPTS: Readonly<Record<string, string>> = {
  '-': '⁻', 0: '⁰', 1: '¹', 2: '²', 3: '³', 4: '⁴', 5: '⁵', 6: '⁶', 7: '⁷', 8: '⁸', 9: '⁹', '.': '·',
};

/** What stands where a number is blank. */
export const BLANK_TEXT = '—';

/** Digits raised, such as ⁻³. */
export function superscript(text: string): string {
  return [...text].map((character) => SUPERSCRIPTS[character] ?? character).join('');
}

/** A number with so many decimals and a real minus sign; −0 is 0. Blank text where it is not finite. */
export function fixedText(value: number, decimals: number): string {
  if (!Number.isFinite(value)) return BLANK_TEXT;
  const text = value.toFixed(Math.min(100, Math.max(0, decimals)));
  return /^-[0.]+$/.test(text) ? text.slice(1) : text.replace('-', MINUS);
}

/** A unit of our files as it is shown: `rad m^-2` → rad m⁻², `rad/m2` → rad/m², `uG` → µG, `deg` → °, `arcsec` → ″. */
export function unitText(unit: string): string {
  if (unit === '1') return '';
  return unit
    .replace(/\*\*|\^/g, '^')
    .replace(/\^\{?(-?[\d.]+)\}?/g, (_, power: string) => superscript(power))
    .replace(/\b([cm]?m|k?pc|s)(-?\d)\b/g, (_, base: string, power: string) => base + superscript(power))
    .replace(/\bu(?=(G|Jy|K|m)\b)/g, 'µ')
    .replace(/\bdeg\b/g, '°')
    .replace(/\barcsec\b/g, '″');
}

/** A written number and its unit: a space between, none before ° ″ %. */
export function joinUnit(number: string, unit: string): string {
  const shown = unitText(unit);
  if (!shown || number === BLANK_TEXT) return number;
  return /^[°″%]/.test(shown) ? number + shown : `${number} ${shown}`;
}

/** A number to so many significant digits; powers of ten from 1e5 up and below 1e-3. */
export function numberText(value: number, digits = 3): string {
  if (!Number.isFinite(value)) return BLANK_TEXT;
  if (value === 0) return '0';
  const exponent = Number(value.toExponential(digits - 1).split('e')[1]);
  if (exponent >= 5 || exponent < -3) {
    return `${fixedText(value / 10 ** exponent, digits - 1)}×10${superscript(String(exponent))}`;
  }
  return roundedText(value, exponent - digits + 1);
}

/** `numberText` with its unit. */
export function quantityText(value: number, unit: string, digits = 3): string {
  return joinUnit(numberText(value, digits), unit);
}

/**
 * A value and its error to the digits that the error allows: two digits of an error that begins
 * with 100 to 354, one above, 950 and more rounded up (the rounding rule of the Review of Particle
 * Physics; from memory). Without a usable error the value alone, to four digits.
 */
export function withError(value: number, error: number | undefined, unit = ''): string {
  if (!Number.isFinite(value)) return BLANK_TEXT;
  if (error === undefined || !Number.isFinite(error) || error <= 0) return quantityText(value, unit, 4);
  const { place, exponent } = digitsFor(value, error);
  const [shown, shownError] = [value, error].map((number) => roundedText(number / 10 ** exponent, place - exponent));
  return assemble(shown, ` ± ${shownError}`, exponent, unit);
}

/** A value with unequal errors below and above (both positive), such as the 16 and 84 % points of a posterior. */
export function withInterval(value: number, below: number, above: number, unit = ''): string {
  if (!(below > 0 && above > 0 && Number.isFinite(below) && Number.isFinite(above))) return withError(value, undefined, unit);
  const { place, exponent } = digitsFor(value, Math.min(below, above));
  const [shown, minus, plus] = [value, below, above].map((number) => roundedText(number / 10 ** exponent, place - exponent));
  return assemble(shown, minus === plus ? ` ± ${plus}` : ` +${plus} ${MINUS}${minus}`, exponent, unit);
}

/** Last decimal place that is kept (a power of ten) and the power taken out, 0 for handy numbers. */
function digitsFor(value: number, error: number): { readonly place: number; readonly exponent: number } {
  let leading = Math.floor(Math.log10(error));
  const three = Math.round(error / 10 ** (leading - 2));
  if (three >= 950) leading += 1;
  const place = three < 355 || three >= 950 ? leading - 1 : leading;
  const size = Math.floor(Math.log10(Math.max(Math.abs(value), error)));
  return { place, exponent: size >= 5 || size < -3 ? size : 0 };
}

function assemble(shown: string, tail: string, exponent: number, unit: string): string {
  if (exponent !== 0) return joinUnit(`(${shown}${tail})×10${superscript(String(exponent))}`, unit);
  const mark = unitText(unit);
  if (/^[°″%]$/.test(mark)) {
    return `${shown}${tail}`.replace(/\d(?= |$)/g, `$&${mark}`);
  }
  return joinUnit(`${shown}${tail}`, unit);
}

/** A number rounded at the decimal place 10^place. */
function roundedText(value: number, place: number): string {
  if (place <= 0) return fixedText(value, -place);
  return fixedText(Math.round(value / 10 ** place) * 10 ** place, 0);
}

const PREFIXES: readonly (readonly [string, number])[] = [
  ['n', 1e-9], ['µ', 1e-6], ['m', 1e-3], ['', 1], ['k', 1e3], ['M', 1e6], ['G', 1e9],
];

/** A factor on the values and the unit that goes with it. */
export interface ShownUnit {
  readonly factor: number;
  readonly unit: string;
}

/**
 * The unit that makes `largest` handy: Jy, Jy/beam, Jy/sr, K and Hz take prefixes (1e-5 Jy/beam →
 * 10 µJy/beam), rad becomes degrees, all else stays as `unitText` shows it.
 */
export function shownUnit(largest: number, unit: string): ShownUnit {
  if (unit === 'rad') return { factor: 180 / Math.PI, unit: '°' };
  if (!/^(Jy|K|Hz)\b/.test(unit) || !(largest > 0) || !Number.isFinite(largest)) return { factor: 1, unit: unitText(unit) };
  const fitting = PREFIXES.filter(([, size]) => size <= largest * (1 + 1e-12));
  const [prefix, size] = fitting.at(-1) ?? PREFIXES[0];
  return { factor: 1 / size, unit: prefix + unitText(unit) };
}
