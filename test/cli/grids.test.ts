import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { inFolder, needPython, pythonJson, runPython } from '../support/tools.ts';
import { gyrelight, smallScene } from './run.ts';

const drawn = smallScene.replace(/^turbulence: .*$/m, 'turbulence: {resolved: {rms: 5 uG, outerScale: 3 kpc, box: 12 kpc, cells: 32, smallest: 1 kpc, electrons: {rms: 0.4}}}').replace('pixels: [22, 21], pixel: 24 arcsec', 'pixels: [9, 8], pixel: 60 arcsec');
const cubeScene = smallScene.replace(/^ {2}- \{model: quadrupole.*$/m, '  - {model: simulation-cube, name: box, field: {x: bx.fits, y: by.npy, z: bz.npy}, unit: uG, axes: zyx, box: {x: [-12 kpc, 12 kpc], y: [-12 kpc, 12 kpc], z: [-6 kpc, 6 kpc]}}');

/** B = (y, -x, 0)/10 uG, free of divergence: FITS with z as its last axis, and NumPy files in both orders. */
const makeCube = `
import numpy as np, sys, hashlib, json
from astropy.io import fits
folder = sys.argv[1]
centres = lambda n, half: (np.arange(n) + 0.5) / n * 2 * half - half
z, y, x = np.meshgrid(centres(12, 6), centres(20, 12), centres(24, 12), indexing='ij')
fits.PrimaryHDU((y / 10).astype('f4')).writeto(folder + '/bx.fits')
np.save(folder + '/by.npy', np.asfortranarray(-x / 10))
np.save(folder + '/bz.npy', np.zeros_like(x, dtype='f4'))
print(json.dumps({f: hashlib.sha256(open(folder + '/' + f, 'rb').read()).hexdigest() for f in ('bx.fits', 'by.npy', 'bz.npy')}))
`;

describe('fields on grids', () => {
  it('drawn turbulence gives the same bytes for any number of workers, and other maps for another realisation', () => {
    inFolder((folder) => {
      writeFileSync(join(folder, 's.yaml'), drawn);
      const map = (out: string, ...flags: readonly string[]): Buffer => {
        const { status, stderr } = gyrelight(['map', 's.yaml', '--out', out, '--quiet', ...flags], folder);
        expect(stderr).toBe('');
        expect(status).toBe(0);
        return readFileSync(join(folder, out, 'Q-low.fits'));
      };
      const one = map('one', '--workers', '1');
      expect(map('two', '--workers', '2').equals(one)).toBe(true);
      expect(map('other', '--workers', '2', '--set', 'turbulence.resolved.realisation=1').equals(one)).toBe(false);
      const { stdout } = gyrelight(['check', 's.yaml'], folder);
      expect(stdout).toMatch(/resolved turbulence: largest \|div B\|\/\|grad B\| (0\.0e\+0|\S+e-1\d) \(divergence-free by construction\)/);
      expect(stdout).toMatch(/waves of 3 to 1\.13 kpc are drawn, 48\.0% of the variance, rms 3\.4\d uG; the rest is unresolved, rms 3\.6\d uG in cells of 337 pc/);
    });
  }, 120_000);

  it('a cube of FITS and NumPy files is mapped, measured by check, and named with its SHA-256 in the outputs', (context) => {
    needPython(context, 'astropy', 'numpy');
    inFolder((folder) => {
      writeFileSync(join(folder, 'cube.yaml'), cubeScene);
      const sums = pythonJson(makeCube, [folder]) as Record<string, string>;
      const check = gyrelight(['check', 'cube.yaml'], folder);
      expect(check.stderr).toBe('');
      expect(check.stdout).toMatch(/box: largest \|div B\|\/\|grad B\| \S+e-\S+ \(measured\)/);
      for (const [file, sum] of Object.entries(sums)) expect(check.stdout).toContain(`${file}: SHA-256 ${sum}`);
      writeFileSync(join(folder, 'points.csv'), 'x,y,z\n1,2,0.5\n-3,4,1\n');
      const probe = gyrelight(['probe', 'cube.yaml', '--points', 'points.csv', '--set', 'field.disc.strength=0 uG'], folder);
      const rows = probe.stdout.split('\n').filter((line) => /^-?[\d.]/.test(line)).map((line) => line.split(/[,\s]+/).map(Number));
      expect(rows).toHaveLength(2);
      [[0.2, -0.1, 0], [0.4, 0.3, 0]].forEach((b, k) => b.forEach((value, axis) => expect(Math.abs(rows[k][3 + axis] - value)).toBeLessThan(1e-6)));
      expect(gyrelight(['map', 'cube.yaml', '--out', 'maps', '--quiet'], folder).status).toBe(0);
      const header = runPython("import sys; from astropy.io import fits; h = fits.getheader(sys.argv[1], 'SCENE'); print([h[f'{k}{n}'] for n in (1, 2, 3) for k in ('INFILE', 'INSHA')])", [join(folder, 'maps', 'U-high.fits')]);
      for (const [file, sum] of Object.entries(sums)) for (const text of [file, sum]) expect(header).toContain(text);
      const summary = readFileSync(join(folder, 'maps', 'summary.json'), 'utf8');
      expect(summary).toContain(sums['bx.fits']);
    });
  });

  it('missing and unfit files end with exit code 2 and nothing written', () => {
    inFolder((folder) => {
      writeFileSync(join(folder, 'cube.yaml'), cubeScene);
      writeFileSync(join(folder, 'bx.fits'), 'no cube');
      const { status, stderr } = gyrelight(['map', 'cube.yaml', '--out', 'maps'], folder);
      expect(status).toBe(2);
      expect(stderr).toMatch(/cube\.yaml:\d+:\d+: bx\.fits: this is neither a FITS file nor a NumPy array file/);
    });
  });
});
