import { mkdtempSync, rmSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { compareAtEqualAccuracy } from './equal-accuracy.ts';
import { measureModels } from './models-in-fit.ts';
import { countSamples } from './samples.ts';
import { timeSlopes } from './slopes.ts';
import { compileTimes, firstCompileFlag, measureStartUp } from './start-up.ts';
import { measureTurbulence } from './turbulence.ts';
import { timeWholeMap } from './whole-map.ts';
import { compareWorkers } from './workers.ts';

// Compares the speed of following rays with plain references, all in one run: ratios travel
// between machines, times do not. Run by `npm run bench`; names of sections run those alone.

const sections: Readonly<Record<string, (folder: string) => void | Promise<void>>> = {
  accuracy: compareAtEqualAccuracy,
  map: timeWholeMap,
  samples: countSamples,
  slopes: timeSlopes,
  workers: compareWorkers,
  models: measureModels,
  start: measureStartUp,
  turbulence: measureTurbulence,
};

const wanted = process.argv.slice(2);
if (wanted[0] === firstCompileFlag) {
  console.log(compileTimes(1)[0]);
} else {
  const unknown = wanted.filter((name) => !Object.hasOwn(sections, name));
  if (unknown.length > 0) throw new Error(`no section ${unknown.join(', ')}; there are ${Object.keys(sections).join(', ')}`);
  const folder = mkdtempSync(join(tmpdir(), 'gyrelight-bench-'));
  try {
    for (const [name, run] of Object.entries(sections)) if (wanted.length === 0 || wanted.includes(name)) await run(folder);
  } finally {
    rmSync(folder, { recursive: true });
  }
}
