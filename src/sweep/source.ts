import type { Override } from '../scene/overrides.ts';
import { columnsOf } from './evaluate.ts';
import { parseSweep } from './parse-sweep.ts';
import { planSweep, type FilesOf, type SceneSource } from './plan.ts';
import type { SweepPlan } from './types.ts';

/** All texts that a sweep is made of: whoever has them makes the same plan. Plain data. */
export interface SweepSource {
  readonly file: string;
  readonly text: string;
  /** In the order of the sweep's scenes. */
  readonly scenes: readonly SceneSource[];
  readonly overrides: readonly Override[];
  /** Of the program. */
  readonly version: string;
}

/** The plan of a sweep. Throws InputError as `parseSweep` and `planSweep` do. */
export function planOf({ file, text, scenes, overrides }: SweepSource, filesOf: FilesOf): SweepPlan {
  return planSweep(parseSweep(text, file), scenes, overrides, filesOf);
}

/** What rows depend on, by the names that a user knows; `same` of two sweeps means the same rows. */
export type SweepIdentity = Readonly<Record<string, string>>;

/** The identity of a plan: its design, measures and scenes, and the version that computes them. */
export function identityOf(plan: SweepPlan, version: string): SweepIdentity {
  const shown = ({ values, spacing, shownUnit }: SweepPlan['axes'][number]): string => JSON.stringify([spacing, shownUnit, ...(values.length > 50 ? [values.length, values[0], values.at(-1)] : values)]);
  return {
    version,
    design: plan.design,
    samples: String(plan.samples),
    seed: plan.design === 'grid' ? '' : String(plan.seed),
    realisations: String(plan.realisations),
    measure: columnsOf(plan).map(({ name }) => name).join(' '),
    maps: plan.maps.join(' '),
    ring: JSON.stringify(plan.ring),
    threshold: String(plan.threshold),
    ...Object.fromEntries(plan.axes.map((axis) => [`vary.${axis.path}`, shown(axis)])),
    'order of vary': plan.axes.map(({ path }) => path).join(' '),
    ...Object.fromEntries(plan.variants.map(({ name, scene }, k) => [`scene ${k + 1}, ${name}`, JSON.stringify({ ...scene, title: '' }, withoutGrids)])),
  };
}

/** Gridded numbers are known by the checksum of their file, which the scene has. */
function withoutGrids(_: string, value: unknown): unknown {
  return ArrayBuffer.isView(value) ? 'numbers' : value;
}

/** The names of what differs between two sweeps; empty where their rows are the same. */
export function changesBetween(old: SweepIdentity, now: SweepIdentity): string[] {
  return [...new Set([...Object.keys(old), ...Object.keys(now)])].filter((key) => old[key] !== now[key]);
}
