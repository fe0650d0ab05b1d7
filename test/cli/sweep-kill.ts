import { spawn } from 'node:child_process';
import { existsSync, readFileSync, statSync } from 'node:fs';
import { join } from 'node:path';
import { randomStream } from '../../src/math/random.ts';
import { journalsIn } from '../../src/files/journal.ts';
import { repository } from './run.ts';

/** A scene of a few hundred rays. */
export const quickScene = `gyrelight: 1
title: A quick scene
galaxy: {distance: 10 Mpc, inclination: 40 deg, positionAngle: 25 deg, volume: {radius: 12 kpc, height: 5 kpc}, centre: {ra: 150 deg, dec: 20 deg}}
field:
  - {model: axisymmetric-spiral, name: disc, strength: 6 uG, pitch: -20 deg, radius: 8 kpc, innerRadius: 1 kpc, height: 0.8 kpc, closure: 4 kpc}
  - {model: quadrupole-halo, name: halo, strength: 2 uG, core: 3 kpc, reference: 5 kpc}
thermalElectrons: [{model: exponential-disc, name: gas, density: 0.03 cm^-3, radius: 10 kpc, height: 1 kpc}]
cosmicRays: {index: 2.8, layers: [{model: exponential-disc, name: electrons, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1.2 kpc}]}
turbulence: {unresolved: {rms: 5 uG, cell: 0.05 kpc}}
observation:
  image: {pixels: 13, pixel: 40 arcsec}
  bands:
    - {name: low, at: [1.4 GHz]}
    - {name: high, at: [4.8 GHz]}
  beam: {major: 60 arcsec, minor: 50 arcsec, angle: 30 deg}
  noise: 20 uJy/beam
numerics: {tolerance: 1e-3, seed: 7}
`;

/** A sweep of 48 quick scenes with 2 realisations: 96 rows. */
export const quickSweep = `gyrelight-sweep: 1
title: Quick
scene: small.scene.yaml
vary:
  galaxy.inclination: {from: 10 deg, to: 80 deg, steps: 12}
  field.halo.core: [1 kpc, 2 kpc, 3 kpc, 4 kpc]
realisations: 2
sectors: 12
measure: [asymmetry, harmonics, polarization, depolarization, origin-height, detectability]
`;

/**
 * Starts the sweep again and again and kills it (signal 9) at random moments after its rows begin, until
 * it has been killed `times` times or has finished; then lets it finish. Returns the kills that hit it.
 */
export async function killAndResume(folder: string, out: string, times: number, seed: number): Promise<number> {
  const random = randomStream(seed, 'kills');
  const store = join(folder, out, 'store');
  const bytes = (): number => journalsIn(store).reduce((sum, path) => sum + statSync(path).size, 0);
  let hits = 0;
  for (let k = 0; k < times && !existsSync(join(folder, out, 'sweep.csv')); k++) {
    const before = bytes();
    const wait = 60 * random.uniform();
    const run = spawn(process.execPath, [repository('dist/gyrelight.js'), 'sweep', 'q.sweep.yaml', '--out', out, '--resume', '--workers', '2', '--quiet'], { cwd: folder, stdio: 'ignore' });
    const ended = new Promise<NodeJS.Signals | null>((resolve) => run.once('exit', (_, signal) => resolve(signal)));
    let isOver = false;
    void ended.then(() => (isOver = true));
    while (!isOver && bytes() === before) await pause(2);
    await pause(wait);
    run.kill('SIGKILL');
    if ((await ended) === 'SIGKILL') hits++;
  }
  const last = spawn(process.execPath, [repository('dist/gyrelight.js'), 'sweep', 'q.sweep.yaml', '--out', out, '--resume', '--quiet'], { cwd: folder, stdio: 'inherit' });
  const code = await new Promise<number | null>((resolve) => last.once('exit', resolve));
  if (code !== 0) throw new Error(`the last run ended with ${code}`);
  return hits;
}

/** The tables of a finished sweep. */
export function tablesOf(folder: string, out: string): readonly Buffer[] {
  return ['sweep.csv', 'sweep.parquet'].map((name) => readFileSync(join(folder, out, name)));
}

function pause(ms: number): Promise<void> {
  return new Promise((resolve) => setTimeout(resolve, ms));
}
