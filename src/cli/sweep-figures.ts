import type { Crossing } from '../sweep/crossings.ts';
import type { SweepReading } from '../sweep/reading.ts';
import type { SweepSource } from '../sweep/source.ts';
import type { SweepPlan } from '../sweep/types.ts';
import type { OutputFolder } from './output-folder.ts';

export function addSweepFigures(_folder: OutputFolder, _plan: SweepPlan, _source: SweepSource, _reading: SweepReading, _crossings: readonly Crossing[], _maps: string): void {
}
