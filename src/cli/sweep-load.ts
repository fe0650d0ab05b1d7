import { dirname, resolve } from 'node:path';
import { readText } from '../files/node-io.ts';
import { gridsBeside } from '../files/scene-files.ts';
import { parseSweep } from '../sweep/parse-sweep.ts';
import { planSweep } from '../sweep/plan.ts';
import type { SweepSource } from '../sweep/source.ts';
import type { SweepPlan } from '../sweep/types.ts';
import { InputError } from '../units/input-error.ts';
import { overridesOf, type CommonFlags } from './run-context.ts';
import { version } from '../files/version.ts';

/** Reads and checks a sweep file with the scenes it names. Throws InputError with file:line:column, or the flag. */
export function loadSweep(file: string, flags: Pick<CommonFlags, 'set' | 'seed'>): { readonly source: SweepSource; readonly plan: SweepPlan } {
  const text = readText(file);
  const sweep = parseSweep(text, file);
  const scenes = sweep.scenes.map(({ file: scene, place }) => {
    const path = resolve(dirname(file), scene);
    try {
      return { file: path, text: readText(path) };
    } catch (error) {
      throw error instanceof InputError ? new InputError(`${scene}: ${error.reason}`, place) : error;
    }
  });
  const overrides = overridesOf(flags);
  return { source: { file, text, scenes, overrides, version }, plan: planSweep(sweep, scenes, overrides, gridsBeside) };
}
