import { findNumber, findString } from './fits-header.ts';
import type { Card, FitsPlace, ImageHdu } from './fits-types.ts';
import { fitsError } from './fits-types.ts';

/** One axis of an image as its header describes it (Greisen & Calabretta 2002). */
export interface Axis {
  /** 1-based, as in the keywords. */
  readonly number: number;
  /** In pixels; 1 for an axis that only the header has. */
  readonly length: number;
  readonly ctype: string;
  readonly cunit: string;
  readonly crval: number;
  readonly crpix: number;
}

export interface Axes {
  readonly axes: readonly Axis[];
  /** World step of world axis i per pixel of pixel axis j, both 1-based: CD, or CDELT times PC or CROTA. */
  readonly step: (i: number, j: number) => number;
}

const MOST_AXES = 9;

/**
 * The axes of an image and its matrix of steps. Throws InputError where PC and CD, or PC and a
 * rotation, are mixed, or where the matrix couples axes that are not both on the sky.
 */
export function readAxes(hdu: ImageHdu, place: FitsPlace): Axes {
  const { cards, shape } = hdu;
  const described = Array.from({ length: MOST_AXES }, (_, i) => i + 1).filter((n) =>
    cards.some((card) => card.keyword === `CTYPE${n}`),
  );
  const wcsAxes = findNumber(cards, 'WCSAXES', place) ?? 0;
  if (wcsAxes > MOST_AXES) throw fitsError(place, `WCSAXES = ${wcsAxes}; allowed: at most ${MOST_AXES}`);
  const count = Math.max(shape.length, wcsAxes, ...described);
  const axes = Array.from({ length: count }, (_, i): Axis => {
    const n = i + 1;
    return {
      number: n,
      length: shape[i] ?? 1,
      ctype: (findString(cards, `CTYPE${n}`, place) ?? '').trim().toUpperCase(),
      cunit: (findString(cards, `CUNIT${n}`, place) ?? '').trim(),
      crval: findNumber(cards, `CRVAL${n}`, place) ?? 0,
      crpix: findNumber(cards, `CRPIX${n}`, place) ?? 0,
    };
  });
  return { axes, step: stepMatrix(cards, axes, place) };
}

/** Is this axis one of the two on the sky? */
export function isCelestial(ctype: string): boolean {
  return /^(RA|DEC)(-|$)/.test(ctype);
}

function stepMatrix(cards: readonly Card[], axes: readonly Axis[], place: FitsPlace): Axes['step'] {
  const cd = matrixElements(cards, 'CD', axes.length, place);
  const pc = matrixElements(cards, 'PC', axes.length, place);
  if (cd.size > 0 && pc.size > 0) throw fitsError(place, 'both CDi_j and PCi_j are given; allowed: one of them');
  const cdelt = axes.map(({ number }) => findNumber(cards, `CDELT${number}`, place));
  const rotated = rotation(cards, axes, cdelt, place);
  if (rotated && pc.size > 0) throw fitsError(place, 'both CROTA and PCi_j are given; allowed: one of them');
  const step = (i: number, j: number): number => {
    // Beside CD, CDELT means nothing, and what CD leaves out is 0 (Greisen & Calabretta 2002, section 2.1.2).
    if (cd.size > 0) return cd.get(`${i}_${j}`) ?? 0;
    const turn = pc.size > 0 ? pc.get(`${i}_${j}`) : rotated?.(i, j);
    return (cdelt[i - 1] ?? 1) * (turn ?? (i === j ? 1 : 0));
  };

  for (const { number: i, ctype: a } of axes) {
    for (const { number: j, ctype: b } of axes) {
      if (i === j || (isCelestial(a) && isCelestial(b)) || step(i, j) === 0) continue;
      throw fitsError(place, `axis ${i} (${a || 'no CTYPE'}) turns with pixel axis ${j} (${b || 'no CTYPE'}); only RA and Dec may`);
    }
  }
  return step;
}

/** Elements CDi_j or PCi_j, with or without leading zeros, and of PC the old form PC00i00j. */
function matrixElements(cards: readonly Card[], letters: 'CD' | 'PC', count: number, place: FitsPlace): Map<string, number> {
  const elements = new Map<string, number>();
  for (const { keyword } of cards) {
    const match = /^(CD|PC)(?:0*(\d+)_0*(\d+)|00(\d)00(\d))$/.exec(keyword);
    if (match === null || match[1] !== letters) continue;
    const i = Number(match[2] ?? match[4]);
    const j = Number(match[3] ?? match[5]);
    if (i > count || j > count || i < 1 || j < 1) throw fitsError(place, `${keyword}: there are ${count} axes`);
    const value = findNumber(cards, keyword, place);
    if (value !== undefined) elements.set(`${i}_${j}`, value);
  }
  return elements;
}

/** The old CROTA on the latitude axis, as PC (Calabretta & Greisen 2002, section 6.1). */
function rotation(
  cards: readonly Card[],
  axes: readonly Axis[],
  cdelt: readonly (number | undefined)[],
  place: FitsPlace,
): ((i: number, j: number) => number | undefined) | undefined {
  const longitude = axes.find(({ ctype }) => /^RA(-|$)/.test(ctype))?.number;
  const latitude = axes.find(({ ctype }) => /^DEC(-|$)/.test(ctype))?.number;
  const angles = axes.map(({ number }) => findNumber(cards, `CROTA${number}`, place) ?? 0);
  const onLatitude = latitude === undefined ? 0 : angles[latitude - 1];
  angles.forEach((crota, i) => {
    // Old files repeat the same rotation on both axes of the sky.
    if (crota === 0 || i + 1 === latitude || (i + 1 === longitude && crota === onLatitude)) return;
    throw fitsError(place, `CROTA${i + 1} = ${crota}; a rotation is allowed on the Dec axis alone`);
  });
  const angle = (onLatitude * Math.PI) / 180;
  if (angle === 0 || longitude === undefined || latitude === undefined) return undefined;
  const ratio = (cdelt[latitude - 1] ?? 1) / (cdelt[longitude - 1] ?? 1);
  return (i, j) => {
    if (i === j && (i === longitude || i === latitude)) return Math.cos(angle);
    if (i === longitude && j === latitude) return -Math.sin(angle) * ratio;
    if (i === latitude && j === longitude) return Math.sin(angle) / ratio;
    return undefined;
  };
}
