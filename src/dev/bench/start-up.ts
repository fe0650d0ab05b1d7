import { execFileSync, spawnSync } from 'node:child_process';
import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';
import { makeRayEngine } from '../../ray/trace.ts';
import { parseScene } from '../../scene/parse-scene.ts';
import { cell } from './timing.ts';
import tenComponents from './ten-components.yaml?raw';

/** Argument with which the benchmark calls itself to compile in a process that has compiled nothing. */
export const firstCompileFlag = 'first-compile';

/** Milliseconds that a scene of ten components takes from checked scene to module, so many times in a row. */
export function compileTimes(times: number): number[] {
  const scene = parseScene(tenComponents, 'ten-components.yaml');
  const spectrum = [1.4e9, 2.3e9, 4.8e9].map((hz) => ({ frequencyHz: hz, centreHz: hz }));
  return Array.from({ length: times }, () => {
    const start = performance.now();
    makeRayEngine(scene, spectrum, 'wasm').transfer();
    return performance.now() - start;
  });
}

/** How long one waits for the first ray. */
export function measureStartUp(folder: string): void {
  const program = fileURLToPath(new URL('./gyrelight.js', import.meta.url));
  const scene = join(folder, 'small.scene.yaml');
  writeFileSync(scene, tenComponents);
  let whole = Infinity;
  for (let k = 0; k < 5; k++) {
    const start = performance.now();
    const run = spawnSync(process.execPath, [program, 'map', scene, '--out', join(folder, `map-${k}`), '--quiet', '--workers', '1'], { encoding: 'utf8' });
    if (run.status !== 0) throw new Error(run.stderr);
    whole = Math.min(whole, performance.now() - start);
  }
  const bare = Math.min(...Array.from({ length: 5 }, () => {
    const start = performance.now();
    spawnSync(process.execPath, ['-e', '0']);
    return performance.now() - start;
  }));
  const self = fileURLToPath(new URL('./bench.js', import.meta.url));
  const cold = Math.min(...Array.from({ length: 5 }, () => Number(execFileSync(process.execPath, [self, firstCompileFlag], { encoding: 'utf8' }))));
  const warm = Math.min(...compileTimes(60));
  console.log('\nstart-up, ms by the clock, the quickest of several');
  console.log(`gyrelight map of 3² pixels, whole process ${cell(whole)}   (node alone ${cell(bare)})`);
  console.log(`scene of ten components to module, first in its process ${cell(cold)}, later ones ${cell(warm)}`);
}
