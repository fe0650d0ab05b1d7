import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { expect, it } from 'vitest';
import { inFolder } from '../support/tools.ts';
import { gyrelight, smallScene } from './run.ts';

const scene = smallScene
  .replace('pixels: [22, 21], pixel: 24 arcsec', 'pixels: 9, pixel: 60 arcsec')
  .replace('{name: low, from: 1.3 GHz, to: 1.5 GHz, channels: 4}', '{name: low, at: [1.4 GHz]}')
  .replace('{name: high, at: [4.8 GHz, 5.2 GHz, 6.1 GHz]}', '{name: high, at: [4.8 GHz]}')
  .replace('major: 72 arcsec, minor: 60 arcsec', 'major: 120 arcsec, minor: 120 arcsec');
const free = 'free: {field.disc.strength: [2 uG, 12 uG], field.disc.pitch: [-45 deg, -5 deg], field.halo.strength: [-5 uG, 5 uG]}';
const study = (noise: number): string => `gyrelight-study: 1
data:
${['low', 'high'].flatMap((band) => ['Q', 'U'].map((quantity) => `  - {quantity: ${quantity}, file: sky/${quantity}-${band}.fits, noise: ${noise} uJy/beam}`)).join('\n')}
hypotheses:
  - {name: quadrupole, scene: quadrupole.scene.yaml, ${free}}
  - {name: dipole, scene: dipole.scene.yaml, ${free}}
method: nested
foreground: fixed
`;

interface Ranked {
  readonly verdict: string;
  readonly hypotheses: readonly { readonly name: string }[];
  readonly pairs: readonly { readonly deltaLogEvidence: number; readonly error: number; readonly decided: boolean }[];
}

/** A quadrupole's maps with noise of this many µJy/beam, and what two hypotheses are worth. */
function rankAt(noise: number): Ranked {
  return inFolder((folder) => {
    writeFileSync(join(folder, 'quadrupole.scene.yaml'), scene);
    writeFileSync(join(folder, 'dipole.scene.yaml'), scene.replace('quadrupole-halo', 'dipole-halo'));
    writeFileSync(join(folder, 'a.study.yaml'), study(noise));
    expect(gyrelight(['map', 'quadrupole.scene.yaml', '--out', 'sky', '--quiet', '--workers', '1', '--seed', '5', '--set', `observation.noise=${noise} uJy/beam`], folder).status).toBe(0);
    const { status, stdout } = gyrelight(['rank', 'a.study.yaml', '--out', 'r', '--live', '40', '--starts', '0', '--workers', '1', '--quiet', '--json'], folder);
    expect(status).toBe(0);
    return JSON.parse(stdout) as Ranked;
  });
}

it('the generating geometry wins by Δ ln Z above 5', () => {
  const { hypotheses, pairs, verdict } = rankAt(200);
  expect(hypotheses[0].name).toBe('quadrupole');
  expect(pairs[0].deltaLogEvidence).toBeGreaterThan(5);
  expect(verdict).toMatch(/prefer "quadrupole" over "dipole"/);
});

it('with ten times the noise the data cannot tell', () => {
  const { pairs, verdict } = rankAt(2000);
  console.log(`Δ ln Z ${pairs[0].deltaLogEvidence.toFixed(2)} ± ${pairs[0].error.toFixed(2)}`);
  expect(pairs[0].decided).toBe(false);
  expect(verdict).toMatch(/^The data cannot tell/);
});
