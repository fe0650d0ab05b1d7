import { readFileSync } from 'node:fs';
import { InputError } from '../../src/units/input-error.ts';

/** The four scenes of the reference numbers (see README.md beside them where they came from). */
export const referenceScenes = ['a-spiral-quadrupole', 'b-bisymmetric-clockwise', 'c-helical-flared', 'd-damped-helical'] as const;

/** Text of a reference scene. */
export function referenceText(name: (typeof referenceScenes)[number]): string {
  return readFileSync(`test/reference/${name}.yaml`, 'utf8');
}

/** A scene with one of everything, line by line, so that a test can spoil a line. */
export const fullScene: readonly string[] = [
  'gyrelight: 1',
  'title: Everything',
  'galaxy:',
  '  distance: 10 Mpc',
  '  inclination: 40 deg',
  '  positionAngle: 25 deg',
  '  volume: {radius: 15 kpc, height: 6 kpc}',
  '  centre: {ra: 150 deg, dec: -20 deg}',
  'field:',
  '  - {model: uniform, x: 1 uG, y: 0 uG, z: 500 nG}',
  '  - {model: quadrupole-halo, name: halo, strength: 2 uG, core: 2 kpc, reference: 5 kpc}',
  '  - {model: toroidal-halo, strength: 2 uG, radius: 7 kpc, innerRadius: 1 kpc, peakHeight: 1.5 kpc, width: 1 kpc, parity: odd}',
  '  - {model: formula, name: mine, parameters: {q: 20 uG kpc^2, a: 300 pc}, potential: {phi: "q*r/(r^2 + z^2 + a^2)"}, edges: {z: ["1.5 kpc", "2*a"]}}',
  'thermalElectrons:',
  '  - {model: sech2-disc, name: warm, density: 0.03 cm^-3, radius: 10 kpc, height: 1 kpc}',
  'cosmicRays:',
  '  index: 2.8',
  '  layers:',
  '    - {model: exponential-disc, name: thick, normalisation: 1e-5 cm^-3, radius: 6 kpc, height: 1.5 kpc, heightIndex: 0.25, heightAt: 1.4 GHz}',
  'turbulence:',
  '  unresolved: {rms: 4 uG, cell: 50 pc, follows: warm}',
  'observation:',
  '  image: {pixels: [64, 32], pixel: 4 arcsec}',
  '  bands:',
  '    - {name: L, from: 1.3 GHz, to: 1.7 GHz, channels: 4}',
  '    - {name: C, at: [4.8 GHz], width: 100 MHz}',
  '    - {name: X, at: [8 GHz, 8.4 GHz]}',
  '  beam: {major: 15 arcsec, minor: 12 arcsec, angle: 30 deg}',
  '  noise: 10 uJy/beam',
  '  foreground: {depth: 12 rad/m^2}',
  'numerics: {tolerance: 1e-5, seed: 7, bits: 64}',
];

/** The full scene with one line (counted from 1) replaced. */
export function spoil(line: number, text: string): string {
  return [...fullScene.slice(0, line - 1), text, ...fullScene.slice(line)].join('\n');
}

/** The message of the InputError that `run` throws, or 'no error'; any other error passes on. */
export function messageOf(run: () => unknown): string {
  try {
    run();
  } catch (error) {
    if (error instanceof InputError) return error.message;
    throw error;
  }
  return 'no error';
}
