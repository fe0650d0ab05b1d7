import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { fitsVerdict, inFolder, needCommand, needPython, pythonJson } from '../support/tools.ts';
import { gyrelight, namesIn, smallScene } from './run.ts';

describe('gyrelight map', () => {
  it('writes every map, clean under fitsverify, and read by astropy where the scene says', (context) => {
    needCommand(context, 'fitsverify');
    needPython(context, 'astropy', 'numpy');
    inFolder((folder) => {
      writeFileSync(join(folder, 'any name at all.yaml'), smallScene);
      const { status, stderr } = gyrelight(['map', 'any name at all.yaml', '--out', 'maps', '--workers', '2', '--origin', '--depth-bins', '4 rad/m^2'], folder);
      expect(stderr).not.toContain('Error');
      expect(status).toBe(0);
      const names = namesIn(join(folder, 'maps'));
      for (const name of ['I-low.fits', 'Q-low.fits', 'U-low.fits', 'P-low.fits', 'fraction-low.fits', 'chi-low.fits', 'originHeight-low.fits', 'originMedian-low.fits', 'originLow-low.fits', 'originHigh-high.fits', 'nearShare-low.fits', 'cancelledShare-low.fits', 'I-high.fits', 'RM.fits', 'RM-error.fits', 'faradayDepth.fits', 'trueFaradaySpectrum-Q-low.fits', 'trueFaradaySpectrum-U-high.fits', 'summary.json', 'overview.svg']) {
        expect(names).toContain(name);
      }
      for (const name of names.filter((file) => file.endsWith('.fits'))) {
        expect(fitsVerdict(new Uint8Array(readFileSync(join(folder, 'maps', name)))), name).toMatch(/found 0 warning.* and 0 error/);
      }
      const seen = pythonJson(astropyView, [join(folder, 'maps')]) as Record<string, unknown>;
      // Centre of the galaxy at pixel (n+1)/2 (design/physics.md section 9), east at the left.
      expect(seen.centre).toEqual([150, 20]);
      expect(seen.eastIsLeft).toBe(true);
      expect(seen.shape).toEqual([4, 21, 22]);
      expect(seen.frequencies).toEqual([1.325e9, 1.375e9, 1.425e9, 1.475e9]);
      expect(seen.tabulated).toEqual([4.8e9, 5.2e9, 6.1e9]);
      expect(seen.beam).toEqual([72, 60, 30]);
      expect(seen.unit).toBe('Jy / beam');
      // Depths are whole multiples of the width; the foreground's 12 rad/m^2 lie before all.
      const spectrum = seen.spectrum as { readonly depths: number[]; readonly unit: string; readonly meanDepth: number; readonly half: number };
      expect(spectrum.unit).toBe('Jy m2 / (rad sr)');
      expect(spectrum.depths.every((depth, k) => depth === spectrum.depths[0] + 4 * k && depth % 4 === 0)).toBe(true);
      // The light of the centre comes, in the mean, from about half of the galaxy's own depth behind the foreground.
      expect(Math.abs(spectrum.meanDepth - spectrum.half)).toBeLessThan(0.25 * Math.abs(spectrum.half) + 4);
      const summary = JSON.parse(readFileSync(join(folder, 'maps', 'summary.json'), 'utf8')) as { tolerance: { asked: number; reached: number }; samplesPerRay: number };
      expect(summary.tolerance.reached).toBeLessThanOrEqual(summary.tolerance.asked);
      expect(summary.samplesPerRay).toBeGreaterThan(8);
    });
  });

  it('gives the same numbers for any number of workers, and other noise for another seed', () => {
    inFolder((folder) => {
      writeFileSync(join(folder, 's.yaml'), smallScene);
      const read = (out: string): Buffer => readFileSync(join(folder, out, 'Q-low.fits'));
      for (const workers of ['1', '2', '3']) expect(gyrelight(['map', 's.yaml', '--out', `w${workers}`, '--workers', workers, '--quiet'], folder).status).toBe(0);
      expect(read('w1').equals(read('w2'))).toBe(true);
      expect(read('w1').equals(read('w3'))).toBe(true);
      expect(gyrelight(['map', 's.yaml', '--out', 'other', '--seed', '8', '--quiet'], folder).status).toBe(0);
      expect(read('other').equals(read('w1'))).toBe(false);
    });
  });

  it('prints the summary as JSON where asked, and nothing else', () => {
    inFolder((folder) => {
      writeFileSync(join(folder, 's.yaml'), smallScene);
      const { stdout, status } = gyrelight(['map', 's.yaml', '--json', '--out', 'o', '--set', 'observation.image.pixels=5'], folder);
      expect(status).toBe(0);
      expect((JSON.parse(stdout) as { image: { nx: number } }).image.nx).toBe(5);
    });
  });
});

const astropyView = `
import sys, json
from astropy.io import fits
from astropy.wcs import WCS
folder = sys.argv[1]
hdus = fits.open(folder + '/Q-low.fits')
head = hdus[0].header
wcs = WCS(head, hdus)
ny, nx = hdus[0].data.shape[-2:]
x, y, nu = wcs.wcs_pix2world([[(nx + 1) / 2, (ny + 1) / 2, 1]], 1)[0]
left = wcs.celestial.wcs_pix2world([[1, (ny + 1) / 2]], 1)[0][0]
tab = fits.open(folder + '/Q-high.fits')
freqs = [WCS(tab[0].header, tab).wcs_pix2world([[1, 1, k + 1]], 1)[0][2] for k in range(3)]
F = [fits.open(folder + '/trueFaradaySpectrum-%s-low.fits' % s)[0] for s in 'QU']
import numpy
depths = [float(F[0].header['CRVAL3'] + (k + 1 - F[0].header['CRPIX3']) * F[0].header['CDELT3']) for k in range(F[0].data.shape[0])]
size = numpy.hypot(F[0].data, F[1].data)[:, 10, 14]
whole = fits.open(folder + '/faradayDepth.fits')[0].data[10, 14]
print(json.dumps({
  'spectrum': {'depths': depths, 'unit': str(__import__('astropy.units', fromlist=['Unit']).Unit(F[0].header['BUNIT'])), 'meanDepth': float((size * depths).sum() / size.sum()), 'half': float(12 + (whole - 12) / 2)},
  'centre': [round(float(x), 9), round(float(y), 9)],
  'eastIsLeft': bool(left > x),
  'shape': list(hdus[0].data.shape),
  'frequencies': [round(float(wcs.wcs_pix2world([[1, 1, k + 1]], 1)[0][2]), 3) for k in range(4)],
  'tabulated': [round(float(f), 3) for f in freqs],
  'beam': [round(head['BMAJ'] * 3600, 6), round(head['BMIN'] * 3600, 6), round(head['BPA'], 6)],
  'unit': str(__import__('astropy.units', fromlist=['Unit']).Unit(head['BUNIT'])),
}))
`;
