import { spawnSync } from 'node:child_process';
import { existsSync, readdirSync } from 'node:fs';
import { join } from 'node:path';
import { fileURLToPath } from 'node:url';

const root = fileURLToPath(new URL('../..', import.meta.url));

/** What a command of the built program did. */
export interface Outcome {
  readonly status: number | null;
  readonly stdout: string;
  readonly stderr: string;
}

/** Runs the built command line as a user would, in `folder` (default: the repository). */
export function gyrelight(parameters: readonly string[], folder: string = root): Outcome {
  const { status, stdout, stderr } = spawnSync(process.execPath, [join(root, 'dist/gyrelight.js'), ...parameters], {
    cwd: folder,
    encoding: 'utf8',
    maxBuffer: 64e6,
  });
  return { status, stdout, stderr };
}

/** Path of a file of the repository. */
export function repository(path: string): string {
  return join(root, path);
}

/** Names in a folder, sorted; empty where there is no such folder. */
export function namesIn(folder: string): readonly string[] {
  return existsSync(folder) ? readdirSync(folder).sort() : [];
}

/** A small scene with two bands and a beam; quick to map. */
export const smallScene = `gyrelight: 1
title: A small scene
galaxy: {distance: 10 Mpc, inclination: 40 deg, positionAngle: 25 deg, volume: {radius: 12 kpc, height: 5 kpc}, centre: {ra: 150 deg, dec: 20 deg}}
field:
  - {model: axisymmetric-spiral, name: disc, strength: 6 uG, pitch: -20 deg, radius: 8 kpc, innerRadius: 1 kpc, height: 0.8 kpc, closure: 4 kpc}
  - {model: quadrupole-halo, name: halo, strength: 2 uG, core: 3 kpc, reference: 5 kpc}
thermalElectrons: [{model: exponential-disc, name: gas, density: 0.03 cm^-3, radius: 10 kpc, height: 1 kpc}]
cosmicRays: {index: 2.8, layers: [{model: exponential-disc, name: electrons, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1.2 kpc}]}
turbulence: {unresolved: {rms: 5 uG, cell: 0.05 kpc}}
observation:
  image: {pixels: [22, 21], pixel: 24 arcsec}
  bands:
    - {name: low, from: 1.3 GHz, to: 1.5 GHz, channels: 4}
    - {name: high, at: [4.8 GHz, 5.2 GHz, 6.1 GHz]}
  beam: {major: 72 arcsec, minor: 60 arcsec, angle: 30 deg}
  noise: 20 uJy/beam
  foreground: {depth: 12 rad/m^2}
numerics: {tolerance: 1e-4, seed: 7}
`;
