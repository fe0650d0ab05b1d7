import { execFileSync } from 'node:child_process';
import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { exactSineCosine } from '../../ray/scene-graph.ts';
import { wavelengthSquared } from '../../ray/synchrotron.ts';
import type { Scene } from '../../scene/types.ts';
import type { MidpointMap } from './midpoint.ts';
import { sideKpc } from './prepare.ts';
import type { Timed } from './timing.ts';
import cSource from './fixed-step.c?raw';
import pythonSource from './fixed-step.py?raw';

/** A program outside that follows scene a with fixed steps: file to run and arguments before the common ones. */
export interface Reference {
  readonly file: string;
  readonly before: readonly string[];
}

/** The C reference, compiled; undefined where there is no compiler. */
export function compileC(folder: string): Reference | undefined {
  const [source, program] = [join(folder, 'fixed-step.c'), join(folder, 'fixed-step')];
  writeFileSync(source, cSource);
  try {
    execFileSync('cc', ['-O3', '-march=native', '-fno-math-errno', '-fno-trapping-math', '-o', program, source, '-lm'], { stdio: 'pipe' });
    return { file: program, before: [] };
  } catch {
    return undefined;
  }
}

/** The numpy reference; undefined where there is no python3 with numpy. */
export function findNumpy(folder: string): Reference | undefined {
  const script = join(folder, 'fixed-step.py');
  writeFileSync(script, pythonSource);
  try {
    execFileSync('/usr/bin/python3', ['-c', 'import numpy'], { stdio: 'pipe' });
    return { file: '/usr/bin/python3', before: [script] };
  } catch {
    return undefined;
  }
}

/** Runs a reference over a square of rays; the map is that of the first frequency. */
export function runReference(reference: Reference, folder: string, scene: Scene, rows: number, steps: number, frequencyHz: readonly number[], runs: number): Timed<MidpointMap> {
  const [sinI, cosI] = exactSineCosine(scene.galaxy.inclination);
  const out = join(folder, 'out.bin');
  const numbers = [rows, sideKpc / rows, sinI, cosI, steps, out, ...frequencyHz.map(wavelengthSquared)].map(String);
  let seconds = Infinity;
  for (let k = 0; k < runs; k++) seconds = Math.min(seconds, Number(execFileSync(reference.file, [...reference.before, ...numbers], { encoding: 'utf8' })));
  const bytes = readFileSync(out);
  const all = new Float64Array(bytes.buffer.slice(bytes.byteOffset, bytes.byteOffset + bytes.byteLength));
  const plane = (k: number): Float64Array => all.subarray(k * rows * rows, (k + 1) * rows * rows);
  return { value: { I: plane(0), Q: plane(1), U: plane(2) }, seconds };
}
