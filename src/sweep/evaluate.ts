import type { RayBackend, Watch } from '../ray/job.ts';
import type { Scene } from '../scene/types.ts';
import { polarizedFraction } from '../sky/derived.ts';
import { observe, type ObservedSky } from '../sky/observe.ts';
import { InputError } from '../units/input-error.ts';
import { convertQuantity } from '../units/quantity.ts';
import { pointCount, type SweepPoint } from './design.ts';
import { measureView, sweepColumns, type ColumnBands, type SweepColumn } from './measures.ts';
import { raysDependOnSeed, sceneAt } from './plan.ts';
import { viewSky, withoutNoise, type SkyView } from './sky-view.ts';
import type { MapName, SweepPlan } from './types.ts';

/** Some realisations of one point: what one worker takes at a time. Row = point x realisations + realisation. */
export interface WorkUnit {
  readonly point: number;
  readonly from: number;
  readonly to: number;
}

/** Most realisations in one unit. */
const unitRealisations = 32;

/** Units of a sweep. */
export function unitCount(plan: SweepPlan): number {
  return pointCount(plan) * unitsPerPoint(plan);
}

/** A unit by number; units follow one another as rows do. */
export function unitAt(plan: SweepPlan, unit: number): WorkUnit {
  const per = unitsPerPoint(plan);
  const from = (unit % per) * unitRealisations;
  return { point: Math.floor(unit / per), from, to: Math.min(from + unitRealisations, Math.max(1, plan.realisations)) };
}

function unitsPerPoint({ realisations }: SweepPlan): number {
  return Math.ceil(Math.max(1, realisations) / unitRealisations);
}

/** The bands of a plan as its columns name them. */
export function columnBands(plan: SweepPlan): ColumnBands {
  const { bands } = plan.variants[0].scene.observation;
  const mean = (k: number): number => bands[k].channels.reduce((sum, { frequencyHz }) => sum + frequencyHz, 0) / bands[k].channels.length;
  const shortest = bands.reduce((best, _, k) => (mean(k) > mean(best) ? k : best), 0);
  return { names: bands.map(({ name }) => name), shortest: bands[shortest].name };
}

/** The measured columns of a plan, in the order of its rows' values. */
export function columnsOf(plan: SweepPlan): readonly SweepColumn[] {
  return sweepColumns(plan.measures, columnBands(plan));
}

/** Seed of the scene in a realisation: the scene's own for the first, then the next ones. */
export function realisationSeed(scene: Scene, realisation: number): number {
  return scene.numerics.seed + realisation;
}

/** A map to be kept of a point. */
export interface KeptMap {
  readonly name: MapName;
  readonly band?: string;
  readonly frequencyHz?: number;
  readonly values: Float64Array;
  readonly unit: string;
}

export interface UnitResult {
  /** Values of `columnsOf`, one list a realisation of the unit. */
  readonly rows: readonly (readonly number[])[];
  /** Maps of the first realisation, where it is in the unit and maps are wanted. */
  readonly maps: readonly KeptMap[];
  readonly scene: Scene;
  readonly sky: ObservedSky;
}

/**
 * Computes one unit. Realisation k has the seed of the scene + k at every point, so that points differ
 * by what is varied and not by luck, and a row can be made again by `map --seed`. Rays are followed
 * once where only noise depends on the seed. Throws InputError naming the point that cannot be.
 */
export async function evaluateUnit(plan: SweepPlan, { variant, values }: SweepPoint, unit: WorkUnit, backend: RayBackend, watch?: Watch): Promise<UnitResult> {
  const scene = placedAtPoint(plan, values, () => sceneAt(plan, variant, values));
  const seeded = (realisation: number): Scene => ({ ...scene, numerics: { ...scene.numerics, seed: realisationSeed(scene, realisation) } });
  const look = (realisation: number): Promise<ObservedSky> => observe(withoutNoise(seeded(realisation)), backend, watch);
  const bands = columnBands(plan);
  const each = raysDependOnSeed(scene);
  let sky = await look(unit.from);
  const first = sky;
  const rows: number[][] = [];
  let maps: readonly KeptMap[] = [];
  for (let realisation = unit.from; realisation < unit.to; realisation++) {
    if (each && realisation > unit.from) sky = await look(realisation);
    const own = seeded(realisation);
    const view = viewSky(own, sky, plan.ring, plan.threshold, plan.realisations > 0 ? own.numerics.seed : undefined);
    rows.push(measureView(plan.measures, view, bands));
    if (realisation === 0) maps = plan.maps.flatMap((name) => keptMaps(name, view));
  }
  return { rows, maps, scene, sky: first };
}

function keptMaps(name: MapName, view: SkyView): KeptMap[] {
  if (name === 'RM') return [{ name, values: view.rotation().rm, unit: 'rad/m2' }];
  return view.bands.map(({ name: band, cube, centre, P, originKpc }): KeptMap => {
    const I = centre.I ?? new Float64Array(P.length);
    const all: Readonly<Record<Exclude<MapName, 'RM'>, readonly [Float64Array, string]>> = {
      I: [I, cube.unit],
      Q: [centre.Q, cube.unit],
      U: [centre.U, cube.unit],
      P: [P, cube.unit],
      fraction: [polarizedFraction(P, I), ''],
      chi: [centre.chi.map((angle) => (angle * 180) / Math.PI), 'deg'],
      'origin-height': [originKpc, 'kpc'],
    };
    const [values, unit] = all[name];
    return { name, band, frequencyHz: centre.frequencyHz, values, unit };
  });
}

function placedAtPoint<T>(plan: SweepPlan, values: ArrayLike<number>, work: () => T): T {
  try {
    return work();
  } catch (error) {
    if (!(error instanceof InputError)) throw error;
    const place = plan.axes.map(({ path, unit, shownUnit }, k) => `${path} = ${Number(convertQuantity(values[k], unit, shownUnit).toPrecision(6))} ${shownUnit}`.trim());
    throw new InputError(`${error.reason} (at the point ${place.join(', ')})`, error.place);
  }
}
