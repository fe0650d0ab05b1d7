import type { EndCondition } from './grid.ts';
import type { DynamoOperator } from './operator.ts';
import { nodeField } from './unknowns.ts';

/** Values within the volume asked for, both halves of the plane. */
export interface MeridionalField {
  readonly radialStepKpc: number;
  readonly verticalStepKpc: number;
  /** Nodes along r from the axis on, and along z from -height to height. */
  readonly radialPoints: number;
  readonly verticalPoints: number;
  /** A_phi, uG kpc, [i + j · radialPoints]. */
  readonly potential: Float64Array;
  /** B_phi, uG. */
  readonly azimuthal: Float64Array;
}

/** The field on the even nodes of the volume; the lower half follows from the conditions in the plane. */
export function volumeField({ grid, unknowns }: Pick<DynamoOperator, 'grid' | 'unknowns'>, x: Float64Array): MeridionalField {
  const field = nodeField(unknowns, x);
  const { radiiKpc, heightsKpc, insideRadial, insideVertical } = grid;
  const middle = heightsKpc.findIndex((z) => z >= 0);
  const [nr, nz] = [insideRadial + 1, 2 * insideVertical + 1];
  const pick = (values: Float64Array, plane: EndCondition): Float64Array =>
    Float64Array.from({ length: nr * nz }, (_, node) => {
      const [i, k] = [node % nr, Math.floor(node / nr) - insideVertical];
      const isReflected = middle === 0 && k < 0;
      const value = values[i + (middle + (isReflected ? -k : k)) * radiiKpc.length];
      return isReflected && plane === 'zero' ? -value : value;
    });
  return {
    radialStepKpc: radiiKpc[1],
    verticalStepKpc: heightsKpc[middle + 1] - heightsKpc[middle],
    radialPoints: nr,
    verticalPoints: nz,
    potential: pick(field.potential, grid.bottom.potential),
    azimuthal: pick(field.azimuthal, grid.bottom.azimuthal),
  };
}

/** The field so scaled that its largest |B_phi| is as wanted, uG. */
export function scaleField(field: MeridionalField, strengthUG: number): MeridionalField {
  const factor = strengthUG / field.azimuthal.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
  return { ...field, potential: field.potential.map((value) => value * factor), azimuthal: field.azimuthal.map((value) => value * factor) };
}

/** The poloidal field of a volume at its nodes, uG, by central differences: for figures and figures of merit. */
export function poloidalField({ radialStepKpc: dr, verticalStepKpc: dz, radialPoints: nr, verticalPoints: nz, potential: a }: MeridionalField): { readonly radial: Float64Array; readonly vertical: Float64Array } {
  const radial = new Float64Array(nr * nz);
  const vertical = new Float64Array(nr * nz);
  for (let j = 0; j < nz; j++) {
    const [low, high] = [Math.max(0, j - 1), Math.min(nz - 1, j + 1)];
    for (let i = 0; i < nr; i++) {
      radial[i + j * nr] = -(a[i + high * nr] - a[i + low * nr]) / ((high - low) * dz);
      const [inner, outer] = [Math.max(0, i - 1), Math.min(nr - 1, i + 1)];
      vertical[i + j * nr] = i === 0 ? (2 * a[1 + j * nr]) / dr : (outer * a[outer + j * nr] - inner * a[inner + j * nr]) / (i * (outer - inner) * dr);
    }
  }
  return { radial, vertical };
}
