import { InputError } from '../units/input-error.ts';
import type { GridArray, GridFile } from './grid-file.ts';

/** Names of the two images of a solved field's file. */
export const extensionNames = { potential: 'A_PHI', azimuthal: 'B_PHI' } as const;

/** What a solved field's file says beside its numbers. */
export interface MeanFieldKeywords {
  readonly parity: string;
  readonly state: string;
}

/**
 * An axisymmetric field on even nodes, for smooth interpolation: A_phi/r (uG) and B_phi/r (uG/kpc), both
 * even in r, [k · radii + i] with r = i · radialStep, z = lowest + k · verticalStep, kpc.
 */
export interface MeanField {
  readonly radii: number;
  readonly heights: number;
  readonly radialStepKpc: number;
  readonly verticalStepKpc: number;
  readonly lowestKpc: number;
  readonly potentialOverRadius: Float64Array;
  readonly azimuthalOverRadius: Float64Array;
  /** Largest |B_phi| on the nodes, uG. */
  readonly strongestUG: number;
}

/** The solved field of a file. Throws InputError, without a place, where the file is another kind of file. */
export function meanFieldOf({ arrays }: GridFile, file: string): MeanField {
  const find = (name: string): GridArray => {
    const found = arrays.find((array) => array.name === name);
    if (!found) throw new InputError(`${file} has no image "${name}"; a field file of "gyrelight dynamo" is wanted, with ${Object.values(extensionNames).join(' and ')}`);
    return found;
  };
  const [potential, azimuthal] = [find(extensionNames.potential), find(extensionNames.azimuthal)];
  if (potential.shape.length !== 2 || potential.shape.join() !== azimuthal.shape.join()) {
    throw new InputError(`${file}: its images have ${potential.shape.join(' x ')} and ${azimuthal.shape.join(' x ')} values; two images of one shape are wanted`);
  }
  refuseUnits(potential, file, 'uG kpc');
  refuseUnits(azimuthal, file, 'uG');
  const [heights, radii] = potential.shape;
  if (radii < 4 || heights < 4) throw new InputError(`${file}: ${radii} radii and ${heights} heights; at least 4 of each are wanted`);
  const radial = axisOf(potential, 1, file);
  const vertical = axisOf(potential, 2, file);
  if (Math.abs(radial.first) > 1e-9 * radial.step) throw new InputError(`${file}: its first radius is ${radial.first} kpc; it must be 0, the axis`);
  return {
    radii,
    heights,
    radialStepKpc: radial.step,
    verticalStepKpc: vertical.step,
    lowestKpc: vertical.first,
    potentialOverRadius: overRadius(potential, radial.step, file),
    azimuthalOverRadius: overRadius(azimuthal, radial.step, file),
    strongestUG: strongestOf(azimuthal, file),
  };
}

function strongestOf({ name, values }: GridArray, file: string): number {
  let most = 0;
  for (const value of values) most = Math.max(most, Math.abs(value));
  if (most === 0) throw new InputError(`${file}: ${name} is 0 everywhere; its largest value sets the scale of the field`);
  return most;
}

function refuseUnits({ name, keywords }: GridArray, file: string, unit: string): void {
  const given = keywords.get('BUNIT');
  if (given !== unit) throw new InputError(`${file}: ${name} has BUNIT = ${given ?? '(none)'}; ${unit} is wanted`);
}

/** First coordinate and step of a linear axis in kpc. */
function axisOf({ name, keywords }: GridArray, axis: 1 | 2, file: string): { readonly first: number; readonly step: number } {
  const number = (keyword: string): number => {
    const value = keywords.get(`${keyword}${axis}`);
    if (typeof value !== 'number') throw new InputError(`${file}: ${name} has no number ${keyword}${axis}`);
    return value;
  };
  const unit = keywords.get(`CUNIT${axis}`);
  if (unit !== 'kpc') throw new InputError(`${file}: ${name} has CUNIT${axis} = ${unit ?? '(none)'}; kpc is wanted`);
  const step = number('CDELT');
  if (!(step > 0)) throw new InputError(`${file}: ${name} has CDELT${axis} = ${step}; a positive step is wanted`);
  return { first: number('CRVAL') + (1 - number('CRPIX')) * step, step };
}

/** f/r of an f that is odd in r; on the axis by f = ar + br^3 through the next two nodes. */
function overRadius({ name, shape: [heights, radii], values }: GridArray, step: number, file: string): Float64Array {
  const ratio = new Float64Array(heights * radii);
  for (let k = 0; k < heights; k++) {
    const row = k * radii;
    for (let i = 0; i < radii; i++) {
      if (!Number.isFinite(values[row + i])) throw new InputError(`${file}: ${name} is ${values[row + i]} at radius ${i} and height ${k}, counted from 0`);
      if (i > 0) ratio[row + i] = values[row + i] / (i * step);
    }
    ratio[row] = (4 * ratio[row + 1] - ratio[row + 2]) / 3;
  }
  return ratio;
}
