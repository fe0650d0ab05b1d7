import { poloidalField, type MeridionalField } from '../field/dynamo/meridional-field.ts';
import type { DynamoProfiles } from '../field/dynamo/profiles.ts';
import type { DynamoSolution, ModeReport, TwoGrids } from '../field/dynamo/solve.ts';
import type { DynamoSpec } from '../field/dynamo/spec.ts';
import type { ThinDiscRate } from '../field/dynamo/thin-disc.ts';
import { convertQuantity } from '../units/quantity.ts';

/** Myr in kpc s/km, the solver's unit of time. */
const unitMyr = convertQuantity(1, 'kpc km^-1 s', 'Myr');
const perGyr = 1000 / unitMyr;

/** What is wrong with a solution on two grids, undefined where its errors are within the tolerance. */
export function convergenceProblem(spec: DynamoSpec, { modes, field, fieldError, period }: DynamoSolution): string | undefined {
  const { grid, parities } = spec.problem;
  const leading = parities.map((parity) => modes.find((mode) => mode.parity === parity)).filter((mode) => mode !== undefined);
  const periodError = period ? period.error / period.fine : 0;
  const errors = [
    ...leading.map(({ parity, growthRate, frequency, relativeError }) => {
      const turning = frequency.fine > 0 || frequency.coarse > 0 ? ` and the frequency ${rateText(frequency.coarse)} and ${rateText(frequency.fine)} rad/Gyr` : '';
      return { error: relativeError, words: `the growth rate of the fastest ${parity} mode is ${rateText(growthRate.coarse)} and ${rateText(growthRate.fine)} per Gyr${turning}` };
    }),
    { error: fieldError.azimuthal, words: `the azimuthal fields differ by ${percent(3 * fieldError.azimuthal)} of their largest value` },
    { error: fieldError.potential, words: `the potentials differ by ${percent(3 * fieldError.potential)} of their largest value` },
    { error: periodError, words: `the period is ${((period?.coarse ?? 0) * unitMyr).toPrecision(4)} and ${((period?.fine ?? 0) * unitMyr).toPrecision(4)} Myr` },
  ];
  const worst = errors.reduce((a, b) => (b.error > a.error ? b : a));
  if (worst.error <= spec.tolerance) return undefined;
  const finer = Math.min(4, Math.sqrt(worst.error / spec.tolerance) * 1.1);
  const even = (cells: number): number => 2 * Math.ceil(cells * finer);
  const [coarse, fine] = [`${grid.radialCells} x ${grid.verticalCells}`, `${2 * grid.radialCells} x ${2 * grid.verticalCells}`];
  const carried = largestCellWind(spec, field);
  const hint = carried > 2 ? `; the wind carries the field ${carried.toPrecision(2)} times faster across a cell than it diffuses, which asks for more cells or more diffusivity` : '';
  return (
    `not converged: on grids of ${coarse} and ${fine} cells ${worst.words}, an error of ${percent(worst.error)} where ${percent(spec.tolerance)} is allowed (solve.tolerance)${hint}; ` +
    `grid: {radial: ${even(grid.radialCells)}, vertical: ${even(grid.verticalCells)}} should do`
  );
}

/** The largest ratio of wind to diffusion across a cell, |V| dz/eta, within the volume. */
function largestCellWind({ problem: { profiles } }: DynamoSpec, { radialStepKpc: dr, verticalStepKpc: dz, radialPoints, verticalPoints }: MeridionalField): number {
  let most = 0;
  for (let j = 0; j < verticalPoints; j++) {
    for (let i = 0; i < radialPoints; i++) {
      const [r, z] = [i * dr, (j - (verticalPoints - 1) / 2) * dz];
      most = Math.max(most, Math.max(Math.abs(profiles.windVertical(r, z)) * dz, Math.abs(profiles.windRadial(r, z)) * dr) / profiles.diffusivity(r, z));
    }
  }
  return most;
}

/** What a dynamo's file makes of its profiles: their ranges within the volume, what is solved and how finely. */
export function profileLines({ problem }: DynamoSpec): readonly string[] {
  const { profiles, surroundings, grid, parities, modes, state } = problem;
  const shown: readonly (readonly [keyof DynamoProfiles, string])[] = [
    ['angularSpeed', 'km/s/kpc'], ['alpha', 'km/s'], ['diffusivity', 'kpc km/s'], ['windRadial', 'km/s'], ['windVertical', 'km/s'], ['equipartition', 'uG'],
  ];
  const steps = 40;
  const ranges = shown.map(([key, unit]) => {
    let [least, most] = [Infinity, -Infinity];
    for (let a = 0; a <= steps; a++) {
      for (let b = 0; b <= steps; b++) {
        const value = profiles[key]((a / steps) * surroundings.radiusKpc, (b / steps) ** 2 * surroundings.heightKpc);
        [least, most] = [Math.min(least, value), Math.max(most, value)];
      }
    }
    return `  ${key}: ${Number(least.toPrecision(3))} to ${Number(most.toPrecision(3))} ${unit} above the plane`;
  });
  const cells = `${2 * grid.radialCells} x ${2 * grid.verticalCells}`;
  return [...ranges, `  solved: ${modes} mode${modes === 1 ? '' : 's'} of ${parities.join(' and ')} parity, then the ${state === 'mode' ? 'fastest mode' : 'saturated field'}, on ${cells} cells and on half as many along each side`];
}

/** Growth rates of the modes, as lines of a table. */
export function modeTable({ modes }: DynamoSolution): readonly string[] {
  return [
    'parity   growth rate            e-folding  oscillates          on half the cells   error',
    ...modes.map(({ parity, growthRate, frequency, relativeError }) =>
      [
        parity.padEnd(6),
        `${rateText(growthRate.fine)} /Gyr`.padStart(13),
        foldingText(growthRate.fine).padStart(19),
        ` ${periodText(frequency.fine)}`.padEnd(19),
        `${rateText(growthRate.coarse)} /Gyr`.padStart(18),
        percent(relativeError).padStart(7),
      ].join(' '),
    ),
  ];
}

/** Growth rates in the one-dimensional limit, as lines of a table; none where none were asked for. */
export function thinDiscTable(rates: readonly ThinDiscRate[]): readonly string[] {
  if (rates.length === 0) return [];
  return [
    'One-dimensional limit (no radial terms):',
    ...rates.map(({ radiusKpc, parity, growthRate, frequency }) => `  r = ${radiusKpc} kpc  ${parity.padEnd(5)} ${rateText(growthRate).padStart(7)} /Gyr  ${foldingText(growthRate)}  ${periodText(frequency)}`),
  ];
}

/** What the field is like, in sentences. */
export function fieldSentences({ parity, state, period, saturationTime, fieldError }: DynamoSolution, field: MeridionalField): readonly string[] {
  const { azimuthalUG, radialUG, verticalUG } = strengths(field);
  const kind = state === 'mode' ? 'fastest mode' : period ? `saturated field, oscillating with a period of ${gyrText(period.fine)}, shown where it is strongest` : 'steady saturated field';
  const reached = saturationTime === undefined ? '' : `, reached ${gyrText(saturationTime)} after a weak seed`;
  const [error] = [Math.max(fieldError.azimuthal, fieldError.potential)];
  return [
    `${kind[0].toUpperCase()}${kind.slice(1)} of ${parity} parity${reached}.`,
    `Largest |B_phi| ${azimuthalUG.toPrecision(3)} uG, |B_r| ${radialUG.toPrecision(3)} uG, |B_z| ${verticalUG.toPrecision(3)} uG; ${percent(error)} of the largest value uncertain by the grid.`,
  ];
}

/** What `summary.json` says; rates per Gyr, times in Myr. */
export function dynamoSummary(spec: DynamoSpec, solution: DynamoSolution, field: MeridionalField, local: readonly ThinDiscRate[]): Record<string, unknown> {
  const { grid } = spec.problem;
  return {
    title: spec.title,
    grids: { coarse: { radial: grid.radialCells, vertical: grid.verticalCells }, fine: { radial: 2 * grid.radialCells, vertical: 2 * grid.verticalCells } },
    tolerance: spec.tolerance,
    modes: solution.modes.map(modeSummary),
    field: {
      state: solution.state,
      parity: solution.parity,
      ...strengths(field),
      errorByGrid: solution.fieldError,
      ...(solution.period && { periodMyr: scaled(solution.period, unitMyr) }),
      ...(solution.saturationTime !== undefined && { saturationTimeMyr: solution.saturationTime * unitMyr }),
    },
    ...(local.length > 0 && { thinDisc: local.map(({ radiusKpc, parity, growthRate, frequency }) => ({ radiusKpc, parity, growthRatePerGyr: growthRate * perGyr, frequencyRadPerGyr: frequency * perGyr })) }),
    notes: spec.notes,
  };
}

function modeSummary({ parity, growthRate, frequency, relativeError }: ModeReport): Record<string, unknown> {
  return {
    parity,
    growthRatePerGyr: scaled(growthRate, perGyr),
    eFoldingMyr: unitMyr / growthRate.fine,
    oscillates: frequency.fine > 0,
    frequencyRadPerGyr: scaled(frequency, perGyr),
    relativeError,
  };
}

function strengths(field: MeridionalField): { azimuthalUG: number; radialUG: number; verticalUG: number } {
  const { radial, vertical } = poloidalField(field);
  const largest = (values: Float64Array): number => values.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
  return { azimuthalUG: largest(field.azimuthal), radialUG: largest(radial), verticalUG: largest(vertical) };
}

function scaled({ fine, coarse, error }: TwoGrids, factor: number): TwoGrids {
  return { fine: fine * factor, coarse: coarse * factor, error: error * factor };
}

/** A rate per kpc s/km as a number per Gyr. */
export function rateText(rate: number): string {
  return (rate * perGyr).toFixed(3);
}

/** The time in which a mode grows, or decays, by e. */
function foldingText(rate: number): string {
  if (rate === 0) return 'steady';
  return `${timeText(1 / Math.abs(rate))}${rate < 0 ? ' (decays)' : ''}`;
}

function periodText(frequency: number): string {
  return frequency === 0 ? 'no' : `every ${timeText((2 * Math.PI) / frequency)}`;
}

/** A time in kpc s/km as Myr, three digits or whole. */
function timeText(time: number): string {
  const myr = time * unitMyr;
  return `${myr < 1000 ? myr.toPrecision(3) : Math.round(myr)} Myr`;
}

function gyrText(time: number): string {
  return `${((time * unitMyr) / 1000).toPrecision(3)} Gyr`;
}

function percent(share: number): string {
  return `${(100 * share).toPrecision(2)} %`;
}
