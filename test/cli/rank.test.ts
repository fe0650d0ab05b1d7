import { existsSync, readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { inFolder, needPython, runPython } from '../support/tools.ts';
import { gyrelight, namesIn, repository, smallScene } from './run.ts';

/** The small scene with one channel a band, fewer pixels and no foreground: a sky to be observed. */
const sky = smallScene
  .replace('{name: low, from: 1.3 GHz, to: 1.5 GHz, channels: 4}', '{name: low, at: [1.4 GHz]}')
  .replace('at: [4.8 GHz, 5.2 GHz, 6.1 GHz]', 'at: [4.8 GHz]')
  .replace('pixels: [22, 21]', 'pixels: [19, 18]');
/** A hypothesis is the same structure with other numbers. */
const start = sky.replace('strength: 6 uG', 'strength: 4 uG').replace('strength: 2 uG', 'strength: 0.5 uG');
const withoutHalo = start.replace(/ {2}- \{model: quadrupole-halo.*\n/, '');
const withDipole = start.replace('quadrupole-halo', 'dipole-halo');

const study = (data: string): string => `gyrelight-study: 1
title: Which halo?
data:
${data}
hypotheses:
  - name: no halo
    scene: none.yaml
    free: {field.disc.strength: [2 uG, 12 uG]}
  - name: quadrupole
    scene: quadrupole.yaml
    free: {field.disc.strength: [2 uG, 12 uG], field.halo.strength: [-6 uG, 6 uG]}
  - name: dipole
    scene: dipole.yaml
    free: {field.disc.strength: [2 uG, 12 uG], field.halo.strength: [-6 uG, 6 uG]}
`;

interface Record_ {
  readonly name: string;
  readonly chi2: number;
  readonly dof: number;
  readonly best: Readonly<Record<string, string>>;
  readonly errors: Readonly<Record<string, string>>;
  readonly neighbourCorrelation: { readonly correlation: number; readonly error: number; readonly bands: Readonly<Record<string, unknown>> };
}

function writeScenes(folder: string): void {
  writeFileSync(join(folder, 'sky.yaml'), sky);
  writeFileSync(join(folder, 'none.yaml'), withoutHalo);
  writeFileSync(join(folder, 'quadrupole.yaml'), start);
  writeFileSync(join(folder, 'dipole.yaml'), withDipole);
}

const value = (text: string): number => Number.parseFloat(text);

describe('gyrelight rank', () => {
  it('finds the generating geometry and its numbers, and writes what it says', (context) => {
    inFolder((folder) => {
      writeScenes(folder);
      expect(gyrelight(['map', 'sky.yaml', '--out', 'maps', '--quiet'], folder).status).toBe(0);
      const data = ['low', 'high'].flatMap((band) => ['Q', 'U'].map((stokes) => `  - {quantity: ${stokes}, file: maps/${stokes}-${band}.fits, noise: 20 uJy/beam}`));
      writeFileSync(join(folder, 'study.yaml'), study(data.join('\n')));
      const { status, stdout, stderr } = gyrelight(['rank', 'study.yaml', '--out', 'out', '--starts', '2'], folder);
      expect(stderr).not.toContain('gyrelight:');
      expect(status).toBe(0);
      expect(stdout).toMatch(/1 quadrupole/);
      expect(stdout).toMatch(/prefer "quadrupole"/);
      const records = JSON.parse(readFileSync(join(folder, 'out', 'ranking.json'), 'utf8')) as Record_[];
      expect(records.map(({ name }) => name)[0]).toBe('quadrupole');
      // χ² of the truth within 4σ of its expectation, and the numbers within 4σ of the truth.
      expect(Math.abs(records[0].chi2 - records[0].dof) / Math.sqrt(2 * records[0].dof)).toBeLessThan(4);
      for (const [path, truth] of [['field.disc.strength', 6], ['field.halo.strength', 2]] as const) {
        expect(Math.abs(value(records[0].best[path]) - truth) / value(records[0].errors[path])).toBeLessThan(4);
      }
      // The truth leaves white residuals, a field without the halo does not.
      const [first, ...rest] = records.map(({ neighbourCorrelation: { correlation, error } }) => correlation / error);
      expect(Math.abs(first)).toBeLessThan(3);
      expect(Math.max(...rest)).toBeGreaterThan(3);
      expect(Object.keys(records[0].neighbourCorrelation.bands)).toEqual(['1.4 GHz', '4.8 GHz']);
      expect(stdout).toMatch(/neighbours/);
      for (const name of ['ranking.csv', 'report.html']) expect(namesIn(join(folder, 'out'))).toContain(name);
      for (const name of ['overview.svg', 'best.scene.yaml', 'model-Q-1.4GHz.fits', 'residual-U-4.8GHz.fits']) expect(namesIn(join(folder, 'out', 'quadrupole'))).toContain(name);
      expect(existsSync(join(folder, 'out', 'unfinished'))).toBe(false);
      needPython(context, 'astropy');
      const columns = runPython("import sys\nfrom astropy.table import Table\nprint(','.join(Table.read(sys.argv[1], format='ascii.ecsv').colnames))", [join(folder, 'out', 'ranking.csv')]);
      expect(columns.trim()).toBe('place,hypothesis,chi2,dof,aic,bic,neighbours,parameter,value,error,unit');
      expect(runPython(readmePython(join(folder, 'out')))).toContain('(1, 18, 19) gyrelight: 1 place');
      const again = gyrelight(['compare', join('out', 'quadrupole', 'best.scene.yaml'), 'study.yaml', '--out', 'cmp', '--json'], folder);
      expect(again.status).toBe(0);
      expect(Math.abs((JSON.parse(again.stdout) as { chi2: number }).chi2 / records[0].chi2 - 1)).toBeLessThan(1e-3);
    });
  });

  it('takes a foreign observation: one file a channel, other projection and signs, no beam in the header', (context) => {
    needPython(context, 'astropy', 'numpy');
    inFolder((folder) => {
      writeScenes(folder);
      expect(gyrelight(['map', 'sky.yaml', '--out', 'maps', '--quiet'], folder).status).toBe(0);
      runPython(foreign, [folder]);
      const entry = (stokes: string, convention: string): string =>
        `  - {quantity: ${stokes}, files: [${stokes}1.fits.gz, ${stokes}2.fits.gz], noise: 0.02 mJy/beam, beam: {major: 72 arcsec, minor: 60 arcsec, angle: 30 deg}, convention: ${convention}, angleOf: E}`;
      writeFileSync(join(folder, 'study.yaml'), study([entry('Q', 'U-reversed'), entry('U', 'U-reversed')].join('\n')));
      const { status, stdout, stderr } = gyrelight(['rank', 'study.yaml', '--out', 'out', '--starts', '2'], folder);
      expect(stderr).not.toContain('gyrelight:');
      expect(status).toBe(0);
      const records = JSON.parse(readFileSync(join(folder, 'out', 'ranking.json'), 'utf8')) as Record_[];
      expect(records[0].name).toBe('quadrupole');
      expect(Math.abs(value(records[0].best['field.halo.strength']) - 2) / value(records[0].errors['field.halo.strength'])).toBeLessThan(4);
      expect(stdout).toMatch(/assumed {2}.*U/);
      // The wrong sign of U picks the wrong fit: the guard is there for this.
      writeFileSync(join(folder, 'study.yaml'), study([entry('Q', 'IAU'), entry('U', 'IAU')].join('\n')));
      expect(gyrelight(['rank', 'study.yaml', '--out', 'wrong', '--starts', '2', '--quiet'], folder).status).toBe(0);
      const wrong = JSON.parse(readFileSync(join(folder, 'wrong', 'ranking.json'), 'utf8')) as Record_[];
      expect(wrong[0].chi2 / wrong[0].dof).toBeGreaterThan(3 * (records[0].chi2 / records[0].dof));
    });
  });

  it.each([
    ['maps that are not there', (s: string) => s, /study\.yaml:4:\d+: .*no such file|maps\/Q-low\.fits/],
    ['walkers without a chain to begin', (s: string) => s.replace('hypotheses:', 'method: sorcery\nhypotheses:'), /study\.yaml:6:\d+: method: .*least-squares/],
    ['an unknown path', (s: string) => s.replace('field.disc.strength', 'field.disk.strength'), /field\.disk\.strength.*did you mean "field\.disc\.strength"|field\.disk/],
  ])('refuses %s', (_, change, pattern) => {
    inFolder((folder) => {
      writeScenes(folder);
      const data = '  - {quantity: Q, file: maps/Q-low.fits, noise: 20 uJy/beam}\n  - {quantity: U, file: maps/U-low.fits, noise: 20 uJy/beam}';
      writeFileSync(join(folder, 'study.yaml'), change(study(data)));
      if (pattern.source.includes('disk')) gyrelight(['map', 'sky.yaml', '--out', 'maps', '--quiet'], folder);
      const { status, stderr } = gyrelight(['rank', 'study.yaml', '--out', 'out'], folder);
      expect(stderr).toMatch(pattern);
      expect(status).toBe(2);
      expect(existsSync(join(folder, 'out'))).toBe(false);
    });
  });

  it('refuses a truncated map and one of another sky', () => {
    inFolder((folder) => {
      writeScenes(folder);
      gyrelight(['map', 'sky.yaml', '--out', 'maps', '--quiet'], folder);
      const bytes = readFileSync(join(folder, 'maps', 'Q-low.fits'));
      writeFileSync(join(folder, 'cut.fits'), bytes.subarray(0, 3000));
      const entry = (file: string): string => `  - {quantity: Q, file: ${file}, noise: 20 uJy/beam}`;
      writeFileSync(join(folder, 'study.yaml'), study(entry('cut.fits')));
      const cut = gyrelight(['rank', 'study.yaml', '--out', 'out'], folder);
      expect(cut.status).toBe(2);
      expect(cut.stderr).toMatch(/cut\.fits.*(truncated|ends|short|bytes)/);
      gyrelight(['map', 'sky.yaml', '--out', 'far', '--set', 'galaxy.centre.ra=10 deg', '--quiet'], folder);
      writeFileSync(join(folder, 'study.yaml'), study(`${entry('far/Q-low.fits')}\n  - {quantity: U, file: far/U-low.fits, noise: 20 uJy/beam}`));
      const far = gyrelight(['rank', 'study.yaml', '--out', 'out'], folder);
      expect(far.status).toBe(2);
      expect(far.stderr).toMatch(/do not show the model's galaxy/);
    });
  });

  it('accepts the example study', () => {
    const { status, stdout } = gyrelight(['check', repository('scenes/lantern-wheel/lantern-wheel.study.yaml'), repository('scenes/lantern-wheel/sky.scene.yaml')]);
    expect(status).toBe(0);
    expect(stdout).toMatch(/hypothesis "helical halo"/);
  });
});

/** The README's Python on this study's results, with what it read printed. */
function readmePython(out: string): string {
  const code = /## Reading the results[\s\S]*?```python\n([\s\S]*?)```/.exec(readFileSync(repository('README.md'), 'utf8'))?.[1] ?? '';
  const here = code.replaceAll('out/lantern-wheel/helical-halo', join(out, 'quadrupole')).replaceAll('out/lantern-wheel', out);
  return `${here}\nprint(q.shape, scene.split('\\n')[0], ranking.colnames[0])`;
}

/** Writes the maps as another observatory would: float64 or scaled integers, TAN, 4 axes, gzip, U reversed. */
const foreign = `
import sys, gzip
import numpy as np
from astropy.io import fits
folder = sys.argv[1]
for stokes, code in (('Q', 2), ('U', 3)):
    for n, band in ((1, 'low'), (2, 'high')):
        source = fits.open(folder + '/maps/%s-%s.fits' % (stokes, band))[0]
        data = np.asarray(source.data, dtype=float).reshape(18, 19) * (-1 if stokes == 'U' else 1) * 1e3
        head = fits.Header()
        for key in ('CRVAL1', 'CRVAL2', 'CRPIX1', 'CRPIX2', 'CDELT1', 'CDELT2'):
            head[key] = source.header[key]
        head['CTYPE1'], head['CTYPE2'] = 'RA---TAN', 'DEC--TAN'
        head['CTYPE3'], head['CRVAL3'], head['CRPIX3'], head['CDELT3'] = 'STOKES', code, 1, 1
        head['CTYPE4'], head['CRVAL4'], head['CRPIX4'], head['CDELT4'], head['CUNIT4'] = 'FREQ', source.header['CRVAL3'], 1, 1.0, 'Hz'
        head['BUNIT'] = 'mJy/beam'
        hdu = fits.PrimaryHDU(data.reshape(1, 1, 18, 19), head)
        if n == 2:
            hdu.scale('int32', bzero=0.0, bscale=1e-7)
        hdu.writeto(folder + '/%s%d.fits.gz' % (stokes, n), overwrite=True)
`;
