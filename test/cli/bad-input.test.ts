import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { inFolder } from '../support/tools.ts';
import { gyrelight, namesIn, smallScene } from './run.ts';

/** A change to the small scene, and what the message must hold. */
const wrongScenes: readonly (readonly [string, (text: string) => string, readonly RegExp[]])[] = [
  ['an unknown key', (s) => s.replace('pitch: -20 deg', 'pich: -20 deg'), [/^gyrelight: s\.yaml:5:\d+: /, /pich/, /did you mean "pitch"/]],
  ['a missing unit', (s) => s.replace('strength: 6 uG', 'strength: 6'), [/s\.yaml:5:\d+: /, /6/, /uG/]],
  ['a wrong unit', (s) => s.replace('strength: 6 uG', 'strength: 6 kpc'), [/s\.yaml:5:\d+: /, /6 kpc/, /uG/]],
  ['no number', (s) => s.replace('strength: 6 uG', 'strength: .nan uG'), [/s\.yaml:5:\d+: /]],
  ['out of range', (s) => s.replace('inclination: 40 deg', 'inclination: 200 deg'), [/s\.yaml:3:\d+: /, /200 deg/, /180/]],
  ['an absurd size', (s) => s.replace('pixels: [22, 21]', 'pixels: 9000000'), [/s\.yaml:11:\d+: /, /9000000/]],
  ['an image beyond memory', (s) => s.replace('pixels: [22, 21]', 'pixels: 16000').replace('24 arcsec', '0.5 arcsec'), [/GB|memory/]],
  ['broken YAML', (s) => s.replace('title: A small scene', 'title: [unclosed'), [/s\.yaml:\d+:\d+: /, /YAML/]],
  ['a key given twice', (s) => `${s}title: again\n`, [/s\.yaml:\d+:\d+: /, /twice/]],
  ['an unknown model', (s) => s.replace('model: quadrupole-halo', 'model: quadrupol-halo'), [/s\.yaml:6:\d+: /, /quadrupol-halo/, /did you mean "quadrupole-halo"/]],
  ['a broken formula', (s) => s.replace('{model: quadrupole-halo, name: halo, strength: 2 uG, core: 3 kpc, reference: 5 kpc}', '{model: formula, name: mine, parameters: {q: 20 uG kpc^2}, potential: {phi: "q*r*zz/(r^2+1)"}}'), [/s\.yaml:6:\d+: /, /zz/]],
  ['a formula with no meaning', (s) => s.replace('{model: quadrupole-halo, name: halo, strength: 2 uG, core: 3 kpc, reference: 5 kpc}', '{model: formula, name: mine, parameters: {q: 20 uG}, field: {x: "q*log(z)"}}'), [/not a number/, /north/]],
  ['a newer format', (s) => s.replace('gyrelight: 1', 'gyrelight: 2'), [/s\.yaml:1:\d+: /, /2/]],
  ['an alias bomb', () => aliasBomb(), [/s\.yaml/]],
];

describe('bad input', () => {
  it.each(wrongScenes)('%s: exit 2, place and reason, nothing written, no stack', (_, change, expected) => {
    inFolder((folder) => {
      writeFileSync(join(folder, 's.yaml'), change(smallScene));
      const { status, stderr, stdout } = gyrelight(['map', 's.yaml', '--out', 'o', '--quiet'], folder);
      expect(status).toBe(2);
      for (const pattern of expected) expect(stderr).toMatch(pattern);
      expect(stderr).not.toMatch(/\n\s+at /);
      expect(stdout).toBe('');
      expect(namesIn(folder)).toEqual(['s.yaml']);
    });
  });

  it.each([
    [['map'], /missing required argument/],
    [['map', 'nowhere.yaml'], /no such file/],
    [['map', 's.yaml', '--nonsense'], /unknown option/],
    [['mapp', 's.yaml'], /unknown command/],
    [['map', 's.yaml', '--workers', 'two'], /--workers two: expected a whole number/],
    [['map', 's.yaml', '--depth-bins', '5'], /--depth-bins 5: .*unit/],
    [['map', 's.yaml', '--depth-bins', '0 rad/m^2'], /--depth-bins 0 rad\/m\^2: expected a width above 0/],
    [['map', 's.yaml', '--depth-bins', '1e-5 rad/m^2', '--set', 'observation.image.pixels=3'], /take wider bins/],
    [['map', 's.yaml', '--engine', 'slurm'], /--engine slurm: this command is no work for a cluster/],
    [['map', 's.yaml', '--set', 'field.halo.strenth=3 uG'], /--set field\.halo\.strenth=3 uG: .*did you mean "strength"/],
    [['map', 's.yaml', '--set', 'inclination'], /expected path=value/],
    [['probe', 's.yaml', '--points', 'nowhere.csv'], /no such file/],
    [['orient', '--receding', '25 deg', '--inclination', '40 deg'], /--near, --arms or --turns/],
    [['orient', '--receding', '25', '--inclination', '40 deg', '--turns', 'clockwise'], /--receding 25: .*unit/],
    [['rank', 's.yaml'], /gyrelight-study/],
    [['compare', 's.yaml', 's.yaml'], /gyrelight-study/],
  ])('%j is refused with words', (parameters, pattern) => {
    inFolder((folder) => {
      writeFileSync(join(folder, 's.yaml'), smallScene);
      const { status, stderr } = gyrelight([...parameters, ...(parameters[0] === 'map' && parameters.length > 1 ? ['--out', 'o'] : [])], folder);
      expect(status).toBe(2);
      expect(stderr).toMatch(pattern);
      expect(stderr).not.toMatch(/\n\s+at /);
      expect(namesIn(folder)).toEqual(['s.yaml']);
    });
  });
});

/** Nine levels of nine aliases each: 4e8 values if expanded. */
function aliasBomb(): string {
  const levels = Array.from({ length: 9 }, (_, k) => (k === 0 ? 'a0: &a0 [x]' : `a${k}: &a${k} [${Array(9).fill(`*a${k - 1}`).join(', ')}]`));
  return `gyrelight: 1\n${levels.join('\n')}\n`;
}
