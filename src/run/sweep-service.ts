import { join } from 'node:path';
import type { Provenance } from '../files/fits-scene.ts';
import { openJournal, type JournalWriter } from '../files/journal.ts';
import { writeWhole } from '../files/node-io.ts';
import { gridsBeside } from '../files/scene-files.ts';
import { mapFits } from '../files/sky-fits-write.ts';
import { EngineCache, localBackend } from '../ray/job.ts';
import { sceneText } from '../scene/parse-scene.ts';
import { makeDesign, type SweepPoint } from '../sweep/design.ts';
import { evaluateUnit, unitAt, type UnitResult } from '../sweep/evaluate.ts';
import { planOf, type SweepSource } from '../sweep/source.ts';
import { shownValue } from '../sweep/table.ts';
import type { SweepPlan } from '../sweep/types.ts';

/** A sweep as a worker is told of it. */
export interface SweepJob {
  readonly source: SweepSource;
  /** Folder of the journals. */
  readonly store: string;
  /** How this worker's journals are called. */
  readonly name: string;
  /** Folder of kept maps. */
  readonly maps: string;
}

/** What one worker does of a sweep: computes units, and appends their rows to a journal of its own. */
export class SweepService {
  private readonly backend = localBackend(new EngineCache());
  private job: SweepJob | undefined;
  private plan: SweepPlan | undefined;
  private design: ((point: number) => SweepPoint) | undefined;
  private journal: JournalWriter | undefined;

  begin(job: SweepJob): void {
    this.job = job;
    this.plan = planOf(job.source, gridsBeside);
    this.design = makeDesign(this.plan);
  }

  /** Computes a unit and writes those of its rows that are `wanted`, first the maps that are kept of it. */
  async compute(unit: number, wanted: readonly number[]): Promise<void> {
    if (!this.job || !this.plan || !this.design) throw new Error('a unit was asked for before its sweep');
    const work = unitAt(this.plan, unit);
    const at = this.design(work.point);
    const result = await evaluateUnit(this.plan, at, work, this.backend);
    this.writeMaps(this.job, this.plan, work.point, at, result);
    this.journal ??= openJournal(this.job.store, this.job.name);
    const first = work.point * Math.max(1, this.plan.realisations);
    for (const row of wanted) this.journal.append(row, result.rows[row - first - work.from]);
  }

  /** Makes sure of what was written. */
  finish(): void {
    this.journal?.close();
    this.journal = undefined;
  }

  private writeMaps({ source, maps: folder }: SweepJob, plan: SweepPlan, point: number, { variant, values }: SweepPoint, { maps, scene, sky }: UnitResult): void {
    if (maps.length === 0) return;
    const overrides = plan.axes.map(({ path, unit, shownUnit }, k) => ({ path, value: `${shownValue(values[k], unit, shownUnit)} ${shownUnit}`.trim(), flag: path }));
    const provenance: Provenance = { sceneText: sceneText(plan.variants[variant].sceneText, source.file, overrides), version: source.version, seed: scene.numerics.seed, inputs: scene.inputs };
    for (const { name, band, frequencyHz, values: pixels, unit } of maps) {
      const about = { quantity: name, unit, sky: sky.grid, values: pixels, ...(band !== undefined && { band, frequencyHz }), ...(scene.observation.beam && name !== 'origin-height' && { beam: scene.observation.beam }) };
      writeWhole(join(folder, pointFolder(point), mapFile(name, band)), mapFits(about, provenance, scene.numerics.bits));
    }
  }
}

/** Folder of a point's maps. */
export function pointFolder(point: number): string {
  return `point-${String(point).padStart(6, '0')}`;
}

/** File of one of its maps. */
export function mapFile(name: string, band: string | undefined): string {
  return `${band === undefined ? name : `${name}-${band}`}.fits`;
}
