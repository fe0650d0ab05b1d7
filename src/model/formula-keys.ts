import type { ModelFormulas, ModelKind } from './types.ts';

/** What is wrong with the formulas of a model, and at which of its keys. */
export interface FormulaProblem {
  readonly reason: string;
  readonly path: readonly string[];
}

const FIELD_KEYS = ['potential', 'euler', 'field'] as const;

/**
 * Checks how a field or density is given: a density by `density`; a field by one of `potential`,
 * `euler`, `field`, or by `potential` with an azimuthal `field: {phi}`; components all cylindrical
 * (r, phi, z) or all Cartesian (x, y, z). Returns undefined where nothing is wrong.
 */
export function findFormulaProblem(kind: ModelKind, formulas: ModelFormulas): FormulaProblem | undefined {
  const given = FIELD_KEYS.filter((key) => formulas[key] !== undefined);
  if (kind === 'density') {
    if (formulas.armPotential) return { reason: 'a density has no "armPotential"', path: ['armPotential'] };
    if (given.length > 0) return { reason: `a density has no "${given[0]}": give "density"`, path: [given[0]] };
    return formulas.density === undefined ? { reason: 'a density needs the formula "density"', path: [] } : undefined;
  }
  if (formulas.density !== undefined) {
    return { reason: 'a field has no "density": give "potential", "euler" or "field"', path: ['density'] };
  }
  if (given.length === 0) return { reason: 'a field needs "potential", "euler" or "field"', path: [] };
  const both = given.length === 2 && formulas.euler === undefined;
  const azimuthal = Object.keys(formulas.field ?? {}).every((key) => key === 'phi');
  if (given.length > 1 && !(both && azimuthal)) {
    return { reason: `${given.join(' and ')} are given: one of them, or potential with field: {phi}, is allowed`, path: [given[1]] };
  }
  return findComponentProblem('potential', formulas.potential) ?? findComponentProblem('armPotential', formulas.armPotential) ?? findComponentProblem('field', formulas.field);
}

function findComponentProblem(key: string, components: Readonly<Record<string, string>> | undefined): FormulaProblem | undefined {
  if (components === undefined) return undefined;
  const names = Object.keys(components);
  if (names.length === 0) return { reason: `${key} has no component: r, phi, z or x, y, z are wanted`, path: [key] };
  const cylindrical = names.every((name) => ['r', 'phi', 'z'].includes(name));
  const cartesian = names.every((name) => ['x', 'y', 'z'].includes(name));
  if (cylindrical || cartesian) return undefined;
  return { reason: `${key} has the components ${names.join(', ')}: some of r, phi, z or some of x, y, z are allowed`, path: [key] };
}
