import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { expect, it } from 'vitest';
import { inFolder } from '../support/tools.ts';
import { gyrelight, smallScene } from './run.ts';

const scene = smallScene
  .replace('pixels: [22, 21], pixel: 24 arcsec', 'pixels: 9, pixel: 60 arcsec')
  .replace('{name: low, from: 1.3 GHz, to: 1.5 GHz, channels: 4}', '{name: low, at: [1.4 GHz]}')
  .replace('{name: high, at: [4.8 GHz, 5.2 GHz, 6.1 GHz]}', '{name: high, at: [4.8 GHz]}')
  .replace('major: 72 arcsec, minor: 60 arcsec', 'major: 120 arcsec, minor: 120 arcsec')
  .replace('turbulence: {unresolved: {rms: 5 uG, cell: 0.05 kpc}}', 'turbulence: {resolved: {rms: 2.5 uG, outerScale: 8 kpc, box: 24 kpc, cells: 16, smallest: 4.5 kpc, follows: gas}}');

const study = (turbulence: string): string => `gyrelight-study: 1
title: Turbulent
data:
${['low', 'high'].flatMap((band) => ['Q', 'U'].map((quantity) => `  - {quantity: ${quantity}, file: sky/${quantity}-${band}.fits, noise: 20 uJy/beam}`)).join('\n')}
hypotheses:
  - {name: drawn, scene: a.scene.yaml, free: {field.disc.strength: [2 uG, 12 uG]}}
  - {name: smooth, scene: smooth.scene.yaml, free: {field.disc.strength: [2 uG, 12 uG]}}
foreground: fixed
${turbulence}`;

interface Record_ {
  readonly name: string;
  readonly chi2: number;
  readonly dof: number;
  readonly best: Readonly<Record<string, string>>;
  readonly errors: Readonly<Record<string, string>>;
}

it('rank judges drawn turbulence by its scatter; without, it warns', () => {
  inFolder((folder) => {
    writeFileSync(join(folder, 'a.scene.yaml'), scene);
    writeFileSync(join(folder, 'smooth.scene.yaml'), scene.replace(/^turbulence.*\n/m, ''));
    writeFileSync(join(folder, 'sky.scene.yaml'), scene);
    writeFileSync(join(folder, 'a.study.yaml'), study('turbulence: {realisations: 24, mean: 2}\n'));
    writeFileSync(join(folder, 'b.study.yaml'), study('turbulence: single\n'));
    expect(gyrelight(['map', 'sky.scene.yaml', '--out', 'sky', '--quiet', '--set', 'turbulence.resolved.realisation=3'], folder).status).toBe(0);
    const rank = (file: string): { readonly records: Record_[]; readonly words: string; readonly report: string } => {
      const { status, stdout, stderr } = gyrelight(['rank', file, '--out', `out-${file}`, '--starts', '0'], folder);
      expect(stderr).not.toContain('gyrelight:');
      expect(status).toBe(0);
      return { records: JSON.parse(readFileSync(join(folder, `out-${file}`, 'ranking.json'), 'utf8')) as Record_[], words: stdout, report: readFileSync(join(folder, `out-${file}`, 'report.html'), 'utf8') };
    };
    writeFileSync(join(folder, 'c.study.yaml'), study('turbulence: {mean: 50}\n'));
    expect(gyrelight(['rank', 'c.study.yaml'], folder).stderr).toMatch(/c\.study\.yaml:12:\d+: 50 realisations in a mean are more than the 40/);
    const judged = rank('a.study.yaml');
    expect(judged.words).toMatch(/maps are compared in 3 rings of 8 sectors/);
    expect(judged.records[0].name).toBe('drawn');
    const [drawn, smooth] = judged.records;
    // 4 maps of up to 24 sectors. Disorder passes: chi2 of the truth within 5 sigma, widened by the 24 realisations; a field without it is off by far.
    expect(drawn.dof).toBeLessThan(96);
    expect((drawn.chi2 - drawn.dof) / Math.sqrt(2 * drawn.dof)).toBeLessThan(5);
    expect(smooth.chi2).toBeGreaterThan(3 * drawn.chi2);
    const off = (record: Record_): number => Math.abs(Number.parseFloat(record.best['field.disc.strength']) - 6) / Number.parseFloat(record.errors['field.disc.strength']);
    expect(off(drawn)).toBeLessThan(4);
    expect(judged.report).not.toContain('judged by one realisation');
    const single = rank('b.study.yaml');
    expect(single.words).toMatch(/Warning: "drawn" has drawn turbulence and is judged by one realisation/);
    expect(single.report).toContain('judged by one realisation');
    expect(single.records.find(({ name }) => name === 'drawn')!.chi2).toBeGreaterThan(3 * drawn.chi2);
    expect(gyrelight(['forecast', 'a.study.yaml'], folder).status).toBe(2);
  });
});
