import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { expect } from 'vitest';
import { gyrelight, smallScene } from './run.ts';

const scene = smallScene
  .replace('pixels: [22, 21], pixel: 24 arcsec', 'pixels: 9, pixel: 60 arcsec')
  .replace('{name: low, from: 1.3 GHz, to: 1.5 GHz, channels: 4}', '{name: low, at: [1.4 GHz]}')
  .replace('{name: high, at: [4.8 GHz, 5.2 GHz, 6.1 GHz]}', '{name: high, at: [4.8 GHz]}')
  .replace('major: 72 arcsec, minor: 60 arcsec', 'major: 120 arcsec, minor: 120 arcsec');

/** A study of two hypotheses, quick to sample. */
export const study = `gyrelight-study: 1
title: Small
data:
${['low', 'high'].flatMap((band) => ['Q', 'U'].map((quantity) => `  - {quantity: ${quantity}, file: sky/${quantity}-${band}.fits, noise: 20 uJy/beam}`)).join('\n')}
hypotheses:
  - {name: halo, scene: a.scene.yaml, free: {field.disc.strength: [2 uG, 12 uG], field.halo.strength: [-5 uG, 5 uG]}}
  - {name: weaker halo, scene: a.scene.yaml, free: {field.disc.strength: [2 uG, 12 uG]}, tied: {field.halo.strength: {formula: "0*s", where: {s: field.disc.strength}}}}
method: nested
foreground: fixed
`;

/** Writes scene and study into a folder, and the maps that the study is of. */
export function prepareStudy(folder: string): void {
  writeFileSync(join(folder, 'a.scene.yaml'), scene);
  writeFileSync(join(folder, 'a.study.yaml'), study);
  expect(gyrelight(['map', 'a.scene.yaml', '--out', 'sky', '--quiet', '--workers', '1'], folder).status).toBe(0);
}
