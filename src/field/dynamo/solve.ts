import { finerCells, type DynamoProblem } from './problem.ts';
import { modesToFinerGrid, toFinerGrid } from './finer-grid.ts';
import { discGrid, type Parity } from './grid.ts';
import { volumeField, type MeridionalField } from './meridional-field.ts';
import { refineModes, searchModes, type Mode } from './modes.ts';
import { discretise, linearMatrix, type DynamoOperator } from './operator.ts';
import { noPause, type Pause } from './pause.ts';
import { withSurroundings } from './profiles.ts';
import { NotSaturated, polishSteady, saturate } from './saturate.ts';
import { diffusionRate, rateScale } from './scales.ts';
import { seedField } from './seed.ts';

/** A number on the given grid and on one of half the cells; `error` is what remains by second order, a third of the difference. */
export interface TwoGrids {
  readonly fine: number;
  readonly coarse: number;
  readonly error: number;
}

/** One mode of the linear equations. Rates per kpc s/km. */
export interface ModeReport {
  readonly parity: Parity;
  readonly growthRate: TwoGrids;
  readonly frequency: TwoGrids;
  /** The rate at which diffusion alone would destroy it: errors are judged by it. */
  readonly diffusionRate: number;
  /** Largest error of growth rate and frequency, relative to diffusionRate + |growth rate| + |frequency|. */
  readonly relativeError: number;
}

/** What the solver found. */
export interface DynamoSolution {
  readonly modes: readonly ModeReport[];
  /** The field of the wanted state, on the fine grid. */
  readonly field: MeridionalField;
  readonly parity: Parity;
  readonly state: 'saturated' | 'mode';
  /** Of a saturated field that oscillates, kpc s/km. */
  readonly period?: TwoGrids;
  /** Model time from a weak seed to saturation, kpc s/km. */
  readonly saturationTime?: number;
  /** Largest difference of the fields on the two grids, over the largest value, a third of it: azimuthal field and potential. */
  readonly fieldError: { readonly azimuthal: number; readonly potential: number };
}

/** The field does not grow: there is nothing to saturate. */
export class DynamoDecays extends Error {
  constructor(
    readonly parity: Parity,
    /** Of the mode that decays slowest, per kpc s/km. */
    readonly growthRate: number,
  ) {
    super('every field decays');
  }
}

interface ParityRun {
  readonly parity: Parity;
  readonly coarse: DynamoOperator;
  readonly fine: DynamoOperator;
  readonly coarseModes: readonly Mode[];
  readonly fineModes: readonly Mode[];
  readonly reports: readonly ModeReport[];
}

/**
 * Leading modes of the wanted parities on two grids, then the field of the wanted state. Throws
 * DynamoDecays, ModesNotFound and NotSaturated; whether errors are small enough is for the caller to judge.
 */
export async function solveDynamo(problem: DynamoProblem, pause: Pause = noPause): Promise<DynamoSolution> {
  const profiles = withSurroundings(problem.profiles, problem.surroundings);
  const runs: ParityRun[] = [];
  for (const parity of problem.parities) {
    await pause(`finding ${parity} modes`, 0, 3);
    const coarse = discretise(discGrid(problem.grid, parity), profiles);
    const coarseModes = searchModes(linearMatrix(coarse, coarse.alpha), problem.modes, rateScale(coarse));
    await pause(`finding ${parity} modes`, 1, 3);
    const fine = discretise(discGrid(finerCells(problem.grid), parity), profiles);
    await pause(`finding ${parity} modes`, 2, 3);
    const fineModes = refineModes(linearMatrix(fine, fine.alpha), modesToFinerGrid(coarse, fine, coarseModes), problem.modes, rateScale(fine));
    const reports = fineModes.map((mode, k) => reportMode(parity, mode, coarseModes[k], diffusionRate(coarse, profiles, coarseModes[k].shape[0])));
    runs.push({ parity, coarse, fine, coarseModes, fineModes, reports });
    await pause(`finding ${parity} modes`, 3, 3);
  }
  const modes = runs.flatMap(({ reports }) => reports);
  const leading = runs.reduce((best, run) => (run.fineModes[0].growthRate > best.fineModes[0].growthRate ? run : best));
  const found = problem.state === 'mode' ? modeFields(leading) : await saturatedFields(leading, problem, pause);
  const fine = volumeField(leading.fine, found.fine);
  return {
    modes,
    field: fine,
    parity: leading.parity,
    state: problem.state,
    fieldError: compareFields(fine, volumeField(leading.coarse, found.coarse)),
    ...(found.period && { period: found.period }),
    ...(found.time !== undefined && { saturationTime: found.time }),
  };
}

function reportMode(parity: Parity, fine: Mode, coarse: Mode, diffusion: number): ModeReport {
  const growthRate = twoGrids(fine.growthRate, coarse.growthRate);
  const frequency = twoGrids(Math.abs(fine.frequency), Math.abs(coarse.frequency));
  const scale = diffusion + Math.abs(fine.growthRate) + Math.abs(fine.frequency);
  return { parity, growthRate, frequency, diffusionRate: diffusion, relativeError: Math.max(growthRate.error, frequency.error) / scale };
}

function twoGrids(fine: number, coarse: number): TwoGrids {
  return { fine, coarse, error: Math.abs(fine - coarse) / 3 };
}

interface StateFields {
  readonly fine: Float64Array;
  readonly coarse: Float64Array;
  readonly period?: TwoGrids;
  readonly time?: number;
}

/** The leading mode on both grids, of the same sign and size: the largest |B_phi| is 1 uG. */
function modeFields({ fine, coarse, fineModes, coarseModes }: ParityRun): StateFields {
  const scaled = (operator: DynamoOperator, [shape]: Mode['shape']): Float64Array => {
    let peak = 0;
    const { azimuthal } = volumeField(operator, shape);
    for (const value of azimuthal) if (Math.abs(value) > Math.abs(peak)) peak = value;
    return shape.map((value) => value / peak);
  };
  return { fine: scaled(fine, fineModes[0].shape), coarse: scaled(coarse, coarseModes[0].shape) };
}

async function saturatedFields({ fine, coarse, fineModes, coarseModes, parity }: ParityRun, problem: DynamoProblem, pause: Pause): Promise<StateFields> {
  const { growthRate } = coarseModes[0];
  if (!(growthRate > 0) || !(fineModes[0].growthRate > 0)) {
    throw new DynamoDecays(parity, fineModes[0].growthRate);
  }
  const seed = seedField(coarse, coarseModes[0], parity, problem.surroundings);
  const first = await saturate(coarse, seed, growthRate, rateScale(coarse), pause);
  await pause('solving on the fine grid', 0, 1);
  const start = toFinerGrid(coarse, fine, first.x);
  if (first.period === undefined) {
    const steady = polishSteady(fine, start) ?? (await saturate(fine, start, fineModes[0].growthRate, rateScale(fine), pause)).x;
    await pause('solving on the fine grid', 1, 1);
    return { fine: steady, coarse: first.x, time: first.time };
  }
  const second = await saturate(fine, start, fineModes[0].growthRate, rateScale(fine), pause);
  if (second.period === undefined) throw new NotSaturated('the field oscillates on the coarse grid and is steady on the fine one');
  return { fine: second.x, coarse: first.x, time: first.time, period: twoGrids(second.period, first.period) };
}

/** A third of the largest difference where nodes fall together, over the largest value. */
function compareFields(fine: MeridionalField, coarse: MeridionalField): DynamoSolution['fieldError'] {
  const error = (key: 'azimuthal' | 'potential'): number => {
    let [difference, largest] = [0, 0];
    for (let node = 0; node < coarse[key].length; node++) {
      const [i, j] = [node % coarse.radialPoints, Math.floor(node / coarse.radialPoints)];
      const value = fine[key][2 * i + 2 * j * fine.radialPoints];
      largest = Math.max(largest, Math.abs(value));
      difference = Math.max(difference, Math.abs(value - coarse[key][node]));
    }
    return difference / (3 * largest);
  };
  return { azimuthal: error('azimuthal'), potential: error('potential') };
}
