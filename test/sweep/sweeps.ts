import { parseSweep } from '../../src/sweep/parse-sweep.ts';
import { planSweep } from '../../src/sweep/plan.ts';
import type { SweepPlan } from '../../src/sweep/types.ts';
import { smallScene } from '../cli/run.ts';

/** The plan of a sweep of the small scene; `body` is what follows its first lines. */
export function smallPlan(body: string, scene = smallScene): SweepPlan {
  return planSweep(parseSweep(`gyrelight-sweep: 1\nscene: s.yaml\n${body}`, 'x.sweep.yaml'), [{ file: 's.yaml', text: scene }], []);
}
