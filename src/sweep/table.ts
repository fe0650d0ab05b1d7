import { convertQuantity } from '../units/quantity.ts';
import type { SweepPoint } from './design.ts';
import { columnsOf, realisationSeed } from './evaluate.ts';
import type { SweepPlan } from './types.ts';

/** A column of the table that a sweep becomes. */
export interface SweepTableColumn {
  readonly name: string;
  readonly unit?: string;
  readonly description?: string;
  readonly type: 'float64' | 'int64' | 'string';
}

/** The columns of the table: where each row lies, then what was measured. */
export function tableColumns(plan: SweepPlan): SweepTableColumn[] {
  return [
    { name: 'point', type: 'int64', description: 'number of the point in the design, from 0' },
    ...(plan.realisations > 0 ? [{ name: 'realisation', type: 'int64', description: 'from 0' } as const] : []),
    { name: 'seed', type: 'int64', description: 'of the scene: map --seed makes the same noise' },
    ...(plan.variants.some(({ sceneName }) => sceneName !== plan.variants[0].sceneName) ? [{ name: 'scene', type: 'string' } as const] : []),
    ...plan.choices.map((name) => ({ name, type: 'string' }) as const),
    ...plan.axes.map(({ path, shownUnit, meaning }) => ({ name: path, ...(shownUnit !== '' && { unit: tableUnit(shownUnit) }), type: 'float64', description: meaning }) as const),
    ...columnsOf(plan).map(({ name, unit, description }) => ({ name, ...(unit !== '' && { unit }), type: 'float64', description }) as const),
  ];
}

/** The cells of a row, in the order of `tableColumns`. */
export function tableCells(plan: SweepPlan, row: number, { variant, values }: SweepPoint, measured: ArrayLike<number>): (number | string)[] {
  const per = Math.max(1, plan.realisations);
  const { scene, sceneName, choices } = plan.variants[variant];
  return [
    Math.floor(row / per),
    ...(plan.realisations > 0 ? [row % per] : []),
    realisationSeed(scene, row % per),
    ...(plan.variants.some((other) => other.sceneName !== plan.variants[0].sceneName) ? [sceneName] : []),
    ...choices,
    ...plan.axes.map(({ unit, shownUnit }, k) => shownValue(values[k], unit, shownUnit)),
    ...Array.from(measured),
  ];
}

/** A value in its shown unit, rid of the rounding of the conversion: 12 digits. */
export function shownValue(value: number, unit: string, shownUnit: string): number {
  return unit === shownUnit ? value : Number(convertQuantity(value, unit, shownUnit).toPrecision(12));
}

/** Units as other tables write them: uG, cm^-3 become uG, cm-3. */
function tableUnit(unit: string): string {
  return unit.replaceAll('^', '');
}
