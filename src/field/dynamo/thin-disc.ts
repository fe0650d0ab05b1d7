import { slabGrid, type Parity } from './grid.ts';
import { searchModes } from './modes.ts';
import { discretise, linearMatrix } from './operator.ts';
import type { DynamoProfiles } from './profiles.ts';
import { rateScale } from './scales.ts';
import { nodeField } from './unknowns.ts';

/** The fastest mode of each parity in the one-dimensional limit. Rates per kpc s/km. */
export interface ThinDiscRate {
  readonly radiusKpc: number;
  readonly parity: Parity;
  readonly growthRate: number;
  readonly frequency: number;
}

const cells = 100;

/**
 * The one-dimensional limit at a radius: no radial terms, B_r = B_phi = 0 at |z| = halfThickness
 * (e.g. Ruzmaikin, Shukurov & Sokoloff 1988). Throws ModesNotFound.
 */
export function thinDiscRate(profiles: DynamoProfiles, radiusKpc: number, halfThicknessKpc: number, parity: Parity): ThinDiscRate {
  const operator = discretise(slabGrid(radiusKpc, halfThicknessKpc, cells, parity), profiles);
  const modes = searchModes(linearMatrix(operator, operator.alpha), 3, rateScale(operator));
  // A potential that is the same at every height is no field.
  const isField = ({ shape }: (typeof modes)[number]): boolean => {
    const { potential, azimuthal } = nodeField(operator.unknowns, shape[0]);
    const [low, high] = potential.reduce(([least, most], value) => [Math.min(least, value), Math.max(most, value)], [Infinity, -Infinity]);
    return high - low + azimuthal.reduce((most, value) => Math.max(most, Math.abs(value)), 0) > 1e-6 * Math.max(Math.abs(low), Math.abs(high));
  };
  const leading = modes.find(isField);
  if (!leading) throw new Error('the one-dimensional limit has no mode with a field');
  return { radiusKpc, parity, growthRate: leading.growthRate, frequency: Math.abs(leading.frequency) };
}
