import { celestialAxes } from './celestial-axes.ts';
import type { Axis } from './fits-axes.ts';
import { readAxes } from './fits-axes.ts';
import { findCard, findString } from './fits-header.ts';
import type { Card, FitsHdu, FitsPlace, ImageHdu } from './fits-types.ts';
import { fitsError, fitsPlace } from './fits-types.ts';
import type { StokesName } from './sky-header.ts';
import { ARCSEC_PER_DEGREE, DEPTH_AXIS, STOKES_NAMES } from './sky-header.ts';
import type { SkyImage, SkyImageOverrides } from './sky-image.ts';
import { readBeam, readChannels } from './sky-keywords.ts';
import { InputError } from '../units/input-error.ts';

/**
 * The image or cube of the sky in a FITS file: 2 to 4 axes in any order, of which two are RA and
 * Dec, the others frequency (FREQ, FREQ-TAB), STOKES 1 to 4 or Faraday depth (FDEP). Throws
 * InputError naming what is not understood.
 */
export function skyImageFromFits(hdus: readonly FitsHdu[], fileName: string, overrides: SkyImageOverrides = {}): SkyImage {
  const notes: string[] = [];
  const { hdu, place } = chooseImage(hdus, fileName, overrides.hduIndex, notes);
  const { facts, order } = skyFacts(hdu, hdus, place, overrides, notes);
  return { ...facts, values: reordered(hdu.values, order) };
}

/** All that a file states of an image of the sky but its values, whose axes are in `order`, the slowest first. */
export interface SkyFacts {
  readonly facts: Omit<SkyImage, 'values'>;
  readonly order: readonly Extent[];
}

/** Reads the header of an image, whose values need not be there. Throws InputError as `skyImageFromFits` does. */
export function skyFacts(hdu: ImageHdu, hdus: readonly FitsHdu[], place: FitsPlace, overrides: SkyImageOverrides, notes: string[]): SkyFacts {
  notes.push(...hdu.notes);
  const { cards } = hdu;
  const matrix = readAxes(hdu, place);
  const { longitude, latitude, wcs } = celestialAxes(matrix, cards, place);
  const step = (axis: Axis): number => matrix.step(axis.number, axis.number);

  // Tell the other axes apart.
  let stokesAxis: Axis | undefined;
  let layerAxis: Axis | undefined;
  for (const axis of matrix.axes) {
    if (axis === longitude || axis === latitude) continue;
    const isStokes = axis.ctype === 'STOKES';
    const isLayer = /^FREQ(-|$)/.test(axis.ctype) || axis.ctype === DEPTH_AXIS;
    // The user says what an axis that the header leaves unnamed is.
    const isStated = axis.ctype === '' && axis.length > 1 && axis.length === listLength(overrides.frequencyHz);
    if (isStokes && !stokesAxis) stokesAxis = axis;
    else if ((isLayer || isStated) && !layerAxis) layerAxis = axis;
    else if (axis.length > 1) {
      const given = axis.ctype === '' ? 'is missing' : `= '${axis.ctype}'`;
      throw fitsError(place, `CTYPE${axis.number} ${given} for an axis of ${axis.length}; allowed beside RA and Dec: one FREQ, FREQ-TAB or ${DEPTH_AXIS}, one STOKES`);
    } else if (axis.ctype !== '') notes.push(`${place.hdu}: axis ${axis.number} ('${axis.ctype}'), one pixel long, is left aside`);
  }

  // Read what they say.
  const quantity = findString(cards, 'QUANTITY', place)?.trim();
  const stokes = stokesAxis ? stokesNames(stokesAxis, step(stokesAxis), place) : STOKES_NAMES.filter((name) => name === quantity);
  const isDepth = layerAxis?.ctype === DEPTH_AXIS;
  const depthsRadM2 = layerAxis && isDepth ? depths(layerAxis, step(layerAxis), place) : undefined;
  const frequency = isDepth ? {} : readChannels({ axis: layerAxis, step: layerAxis ? step(layerAxis) : 0, cards, hdus, overrides, place }, notes);
  const band = findString(cards, 'BAND', place);
  const unit = overrides.unit ?? unitOf(cards, place, notes);
  const strides = strideOf(hdu.shape);
  const order = [stokesAxis, layerAxis, latitude, longitude].map((axis) => ({ length: axis?.length ?? 1, stride: axis ? (strides[axis.number - 1] ?? 0) : 0 }));
  const facts = {
    nx: longitude.length,
    ny: latitude.length,
    pixelArcsec: Math.sqrt(Math.abs(wcs.cd[0] * wcs.cd[3] - wcs.cd[1] * wcs.cd[2])) * ARCSEC_PER_DEGREE,
    wcs,
    ...frequency,
    ...(depthsRadM2 && { depthsRadM2 }),
    stokes,
    ...(quantity && { quantity }),
    ...(band !== undefined && { band }),
    unit,
    beam: overrides.beam ?? readBeam(cards, place),
    convention: overrides.convention ?? convention(cards, place),
    notes,
  };
  return { facts, order };
}

function chooseImage(hdus: readonly FitsHdu[], file: string, index: number | undefined, notes: string[]): { hdu: ImageHdu; place: FitsPlace } {
  const hasData = (hdu: FitsHdu): hdu is ImageHdu => hdu.kind === 'image' && hdu.values.length > 0;
  const chosen = index ?? hdus.findIndex(hasData);
  const hdu = hdus[chosen];
  if (hdu === undefined || !hasData(hdu)) {
    throw new InputError(index === undefined ? 'the file holds no image' : `HDU ${index} of the file holds no image`, { file });
  }
  const place = fitsPlace(file, chosen, hdu.name);
  if (hdu.shape.length < 2 || hdu.shape.length > 4) throw fitsError(place, `NAXIS = ${hdu.shape.length}; allowed: 2 to 4`);
  const others = hdus.filter((other) => other !== hdu && hasData(other)).length;
  if (index === undefined && others > 0) notes.push(`${place.hdu} is read; the file holds ${others} more image${others > 1 ? 's' : ''}`);
  return { hdu, place };
}

function listLength(frequency: number | readonly number[] | undefined): number {
  return typeof frequency === 'object' ? frequency.length : 0;
}

function stokesNames(axis: Axis, step: number, place: FitsPlace): StokesName[] {
  return Array.from({ length: axis.length }, (_, k) => {
    const code = axis.crval + step * (k + 1 - axis.crpix);
    const name = STOKES_NAMES[Math.round(code) - 1];
    if (Math.abs(code - Math.round(code)) < 1e-6 && name !== undefined) return name;
    throw fitsError(place, `plane ${k + 1} of axis ${axis.number} (STOKES) has code ${code}; allowed: 1 to 4 (I, Q, U, V)`);
  });
}

function depths(axis: Axis, step: number, place: FitsPlace): number[] {
  if (!/^rad(\/|\.| |\*)? ?m\(?(-2|\^-2|\*\*-2|2|\^2|\*\*2)\)?$/.test(axis.cunit)) {
    throw fitsError(place, `CUNIT${axis.number} = '${axis.cunit}'; allowed: rad/m2`);
  }
  return Array.from({ length: axis.length }, (_, k) => axis.crval + step * (k + 1 - axis.crpix));
}

function unitOf(cards: readonly Card[], place: FitsPlace, notes: string[]): string {
  const unit = findString(cards, 'BUNIT', place)?.trim() ?? '';
  const isOwn = findCard(cards, 'QUANTITY') !== undefined;
  if (unit === '' && !isOwn) notes.push(`${place.hdu}: BUNIT is missing`);
  return unit.toUpperCase() === 'JY/BEAM' ? 'Jy/beam' : unit;
}

function convention(cards: readonly Card[], place: FitsPlace): 'IAU' | 'U-reversed' | undefined {
  const given = findString(cards, 'POLCCONV', place)?.trim().toUpperCase();
  if (given === undefined || given === '') return undefined;
  if (given === 'IAU') return 'IAU';
  if (given === 'COSMO') return 'U-reversed';
  throw fitsError(place, `POLCCONV = '${given}'; allowed: IAU, COSMO`);
}

function strideOf(shape: readonly number[]): number[] {
  let stride = 1;
  return shape.map((length) => {
    const own = stride;
    stride *= length;
    return own;
  });
}

/** Length of an axis, and how far apart its values lie in the file. */
interface Extent {
  readonly length: number;
  readonly stride: number;
}

/** The values with these axes, the slowest first. */
function reordered(values: Float64Array, [stokes, layer, row, column]: readonly Extent[]): Float64Array {
  const sorted = new Float64Array(values.length);
  let index = 0;
  for (let s = 0; s < stokes.length; s++) {
    for (let k = 0; k < layer.length; k++) {
      for (let y = 0; y < row.length; y++) {
        const start = s * stokes.stride + k * layer.stride + y * row.stride;
        for (let x = 0; x < column.length; x++) sorted[index++] = values[start + x * column.stride];
      }
    }
  }
  return sorted;
}
