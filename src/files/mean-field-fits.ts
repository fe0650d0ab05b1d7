import type { MeridionalField } from '../field/dynamo/meridional-field.ts';
import { extensionNames, type MeanFieldKeywords } from '../field/mean-field.ts';
import type { Provenance } from './fits-scene.ts';
import { sceneTable } from './fits-scene.ts';
import type { Card } from './fits-types.ts';
import { makeImage, writeFits } from './fits-write.ts';

/**
 * A solved field as a FITS file: two images over (r, z), the potential A_phi in uG kpc and the azimuthal
 * field B_phi in uG, with linear axes in kpc, and the dynamo's whole file in the SCENE table.
 */
export function meanFieldFits(field: MeridionalField, about: MeanFieldKeywords, provenance: Provenance): Uint8Array {
  const shape = [field.radialPoints, field.verticalPoints];
  const cards = (unit: string, what: string): Card[] => [
    { keyword: 'BUNIT', value: unit },
    { keyword: 'WCSAXES', value: 2 },
    ...axisCards(1, 'R', 0, field.radialStepKpc),
    ...axisCards(2, 'Z', -((field.verticalPoints - 1) / 2) * field.verticalStepKpc, field.verticalStepKpc),
    { keyword: 'PARITY', value: about.parity, comment: 'of the field about the plane' },
    { keyword: 'STATE', value: about.state, comment: 'saturated, or a mode of the linear equations' },
    { keyword: 'COMMENT', comment: `${what} Axisymmetric, r from the axis, z along the spin: B_r = -dA_phi/dz, B_z = (1/r) d(r A_phi)/dr.` },
  ];
  return writeFits([
    makeImage(shape, field.potential, -64, cards('uG kpc', 'Azimuthal component of the vector potential.'), extensionNames.potential),
    makeImage(shape, field.azimuthal, -64, cards('uG', 'Azimuthal component of the magnetic field, along the rotation where positive.'), extensionNames.azimuthal),
    sceneTable(provenance),
  ]);
}

function axisCards(axis: 1 | 2, name: string, first: number, step: number): Card[] {
  return [
    { keyword: `CTYPE${axis}`, value: name },
    { keyword: `CUNIT${axis}`, value: 'kpc' },
    { keyword: `CRPIX${axis}`, value: 1 },
    { keyword: `CRVAL${axis}`, value: first },
    { keyword: `CDELT${axis}`, value: step },
  ];
}
