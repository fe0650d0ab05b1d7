import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, test } from 'vitest';
import { readFits } from '../../src/files/fits-read.ts';
import { makeTable } from '../../src/files/fits-table.ts';
import type { Card, FitsHdu } from '../../src/files/fits-types.ts';
import { makeImage } from '../../src/files/fits-write.ts';
import { skyImageFromFits } from '../../src/files/sky-fits-read.ts';
import type { SkyImage, SkyImageOverrides } from '../../src/files/sky-image.ts';
import { InputError } from '../../src/units/input-error.ts';
import { inFolder, needPython, pythonJson } from '../support/tools.ts';

type Header = Readonly<Record<string, string | number | boolean>>;

const SKY: Header = { CTYPE1: 'RA---SIN', CRPIX1: 2, CRVAL1: 150, CDELT1: -0.001, CTYPE2: 'DEC--SIN', CRPIX2: 3, CRVAL2: 20, CDELT2: 0.001, BUNIT: 'Jy/beam' };
const FREQ: Header = { ...SKY, CTYPE3: 'FREQ', CUNIT3: 'GHz', CRPIX3: 2, CRVAL3: 1.4, CDELT3: -0.1 };

/** An image of counting values with this header; a keyword set to '' is left out. */
function image(shape: readonly number[], header: Header, more: readonly FitsHdu[] = []): FitsHdu[] {
  const cards: Card[] = Object.entries(header).flatMap(([keyword, value]) => (value === '' ? [] : [{ keyword, value }]));
  const count = shape.reduce((product, n) => product * n, 1);
  return [makeImage(shape, Float64Array.from({ length: count }, (_, i) => i), -64, cards), ...more];
}

const read = (shape: readonly number[], header: Header, overrides?: SkyImageOverrides): SkyImage => skyImageFromFits(image(shape, header), 'f', overrides);

/** astropy's pixel scale matrix, world axis by axis, and world coordinates of pixel (3, 2). */
const WRITE = `
import sys, json
import numpy as np
from astropy.io import fits
from astropy.wcs import WCS
folder = sys.argv[1]
rng = np.random.default_rng(8)
sky = [dict(CTYPE='RA---TAN', CUNIT='deg', CRVAL=150.0, CRPIX=3.5, CDELT=-0.002), dict(CTYPE='DEC--TAN', CUNIT='deg', CRVAL=40.0, CRPIX=2.5, CDELT=0.003)]
freq = dict(CTYPE='FREQ', CUNIT='MHz', CRVAL=1400.0, CRPIX=2.0, CDELT=20.0)
stokes = dict(CTYPE='STOKES', CRVAL=1.0, CRPIX=1.0, CDELT=1.0)
lengths = {'RA---TAN': 5, 'DEC--TAN': 4, 'FREQ': 3, 'STOKES': 2}
def write(name, axes, extra={}, drop=()):
    shape = [lengths[a['CTYPE']] for a in axes][::-1]
    h = fits.PrimaryHDU(rng.normal(size=shape))
    for i, a in enumerate(axes):
        for k, v in a.items():
            if k not in drop: h.header[f'{k}{i + 1}'] = v
    h.header.update(extra)
    h.writeto(f'{folder}/{name}.fits')
    w = WCS(h.header)
    order = [[a['CTYPE'] for a in axes].index(c) for c in ('STOKES', 'FREQ', 'DEC--TAN', 'RA---TAN') if c in [a['CTYPE'] for a in axes]]
    n = len(axes)
    data = h.data.transpose([n - 1 - i for i in order])
    lon, lat = w.wcs.lng, w.wcs.lat
    m = w.pixel_scale_matrix
    out[name] = dict(values=data.ravel().tolist(), cd=[m[lon][lon], m[lon][lat], m[lat][lon], m[lat][lat]])
    if 'FREQ' in [a['CTYPE'] for a in axes]:
        f = [a['CTYPE'] for a in axes].index('FREQ')
        p = np.ones((3, n)); p[:, f] = [1, 2, 3]
        out[name]['freq'] = w.wcs_pix2world(p, 1)[:, f].tolist()
out = {}
write('plain', sky)
write('ordered', sky + [freq, stokes])
write('swapped', sky + [stokes, freq])
write('turned', [freq, sky[1], stokes, sky[0]])
write('three', [stokes] + sky)
write('cd', sky + [freq], {'CD1_1': -0.002, 'CD1_2': 0.0004, 'CD2_1': 0.0003, 'CD2_2': 0.003, 'CD3_3': 20.0}, ('CDELT',))
write('pc', sky + [freq], {'PC1_1': 0.8, 'PC1_2': -0.6, 'PC2_1': 0.6, 'PC2_2': 0.8})
write('crota', sky, {'CROTA2': 25.0})
print(json.dumps(out))
`;

test('maps and cubes by astropy: axes in any order, CD, PC and CROTA', (context) => {
  needPython(context, 'astropy', 'numpy');
  interface Wanted {
    readonly values: number[];
    readonly cd: number[];
    readonly freq?: number[];
  }
  inFolder((folder) => {
    const wanted = pythonJson(WRITE, [folder]) as Record<string, Wanted>;
    expect(Object.keys(wanted)).toHaveLength(8);
    for (const [name, want] of Object.entries(wanted)) {
      const bytes = new Uint8Array(readFileSync(join(folder, `${name}.fits`)));
      const found = skyImageFromFits(readFits(bytes, name), name);
      expect(found, name).toMatchObject({ nx: 5, ny: 4 });
      expect(Array.from(found.values), name).toEqual(want.values);
      expect(found.wcs, name).toMatchObject({ projection: 'TAN', raDeg: 150, decDeg: 40, crpixX: 3.5, crpixY: 2.5 });
      // A few roundings of products of sines; of degrees per pixel, absolute where an element is 0.
      found.wcs.cd.forEach((value, k) => expect(Math.abs(value - want.cd[k]), `${name} ${k}`).toBeLessThanOrEqual(1e-17));
      if (want.freq === undefined) expect(found.channels).toBeUndefined();
      else {
        // astropy gives Hz whatever the header's unit: 1e-15 is rounding.
        want.freq.forEach((frequency, k) => {
          expect(Math.abs((found.channels?.[k].frequencyHz ?? NaN) - frequency)).toBeLessThanOrEqual(1e-15 * frequency);
        });
      }
      const stokes = name === 'ordered' || name === 'swapped' || name === 'turned' || name === 'three' ? ['I', 'Q'] : [];
      expect(found.stokes, name).toEqual(stokes);
    }
  });
});

describe('frequencies', () => {
  test('a linear axis, its width from the spacing with a note, or as stated', () => {
    const cube = read([3, 2, 3], FREQ);
    expect(cube.channels?.map((c) => c.frequencyHz / 1e9)).toEqual([1.5, 1.4, 1.4 - 0.1]);
    expect(cube.channels?.every((c) => c.widthHz === 1e8)).toBe(true);
    expect(cube.notes).toEqual(['HDU 0 (primary): the header states no channel width; taken as the spacing of the channels, 100000000 Hz']);
    expect(read([3, 2, 3], FREQ, { widthHz: 5e6 }).channels?.[2].widthHz).toBe(5e6);
    expect(read([3, 2, 3], FREQ, { widthHz: 5e6 }).notes).toEqual([]);
    expect(read([3, 2, 3], { ...FREQ, CHANWID: 7 }).channels?.[1].widthHz).toBe(7);
  });

  test('keywords and the user where there is no axis', () => {
    expect(read([3, 2], { ...SKY, RESTFRQ: 4.8e9 })).toMatchObject({ channels: [{ frequencyHz: 4.8e9, widthHz: 0 }] });
    expect(read([3, 2], { ...SKY, RESTFRQ: 4.8e9 }, { frequencyHz: 5e9 }).channels?.[0].frequencyHz).toBe(5e9);
    expect(read([3, 2], SKY).channels).toBeUndefined();
    // An axis that only the header has: a single channel of a map.
    expect(read([3, 2], { ...FREQ, WCSAXES: 3, CRPIX3: 1 }).channels?.[0].frequencyHz).toBe(1.4e9);
    // An axis without a name is what the user says.
    const stated = read([3, 2, 2], SKY, { frequencyHz: [1e9, 2e9], widthHz: 0, noise: 3 });
    expect(stated).toMatchObject({ channels: [{ frequencyHz: 1e9 }, { frequencyHz: 2e9 }], noise: [3, 3] });
    expect(() => read([3, 2, 3], FREQ, { frequencyHz: [1e9, 2e9] })).toThrow('2 frequencies are stated for an image of 3 channels');
  });

  test('a lookup table with an index column: linear between entries (Greisen et al. 2006, section 6.1)', () => {
    const header = { ...SKY, CTYPE3: 'FREQ-TAB', CUNIT3: 'Hz', CRPIX3: 1, CRVAL3: 0, CDELT3: 5, PS3_0: 'LOOKUP', PS3_1: 'F', PS3_2: 'PSI' };
    const table = (psi: readonly number[]): FitsHdu =>
      makeTable('LOOKUP', [
        { name: 'F', unit: 'MHz', letter: 'D', repeat: 3, dimensions: [1, 3], numbers: [1000, 2000, 5000] },
        { name: 'PSI', letter: 'D', repeat: 3, numbers: psi },
      ]);
    const frequencies = (psi: readonly number[]): number[] | undefined =>
      skyImageFromFits(image([3, 2, 3], header, [table(psi)]), 'f').channels?.map((c) => c.frequencyHz / 1e6);
    expect(frequencies([0, 5, 10])).toEqual([1000, 2000, 5000]);
    expect(frequencies([0, 10, 20])).toEqual([1000, 1500, 2000]);
    expect(() => frequencies([5, 6, 7])).toThrow('gives channel 1 the frequency NaN Hz');
    expect(() => read([3, 2, 3], header)).toThrow("PS3_0 = 'LOOKUP', version 1: the file has no such table");
  });
});

describe('other keywords', () => {
  test('beam, unit, sign convention', () => {
    const header = { ...SKY, BUNIT: 'JY/BEAM', BMAJ: 0.01, BMIN: 0.005, BPA: 90, POLCCONV: 'COSMO' };
    expect(read([3, 2], header)).toMatchObject({ unit: 'Jy/beam', beam: { majorArcsec: 36, minorArcsec: 18, angle: Math.PI / 2 }, convention: 'U-reversed' });
    const stated = { beam: { majorArcsec: 3, minorArcsec: 2, angle: 1 }, unit: 'K', convention: 'IAU' } as const;
    expect(read([3, 2], { ...header, CHANMBM: true }, stated)).toMatchObject(stated);
    expect(read([3, 2], { ...SKY, BUNIT: '' }).notes).toEqual(['HDU 0 (primary): BUNIT is missing']);
  });

  test('axes of one pixel that are not understood are left aside with a note', () => {
    expect(read([3, 2, 1], { ...SKY, CTYPE3: 'VRAD', CDELT3: 1000 }).notes).toEqual(["HDU 0 (primary): axis 3 ('VRAD'), one pixel long, is left aside"]);
  });

  test('an image is chosen, and others are told of', () => {
    const two = image([3, 2], SKY, image([3, 3], SKY));
    expect(skyImageFromFits(two, 'f')).toMatchObject({ ny: 2, notes: ['HDU 0 (primary) is read; the file holds 1 more image'] });
    expect(skyImageFromFits(two, 'f', { hduIndex: 1 })).toMatchObject({ ny: 3, notes: [] });
    expect(() => skyImageFromFits(two, 'f', { hduIndex: 2 })).toThrow('f: HDU 2 of the file holds no image');
  });

  test('old forms of the matrix', () => {
    const zeros = read([3, 2], { ...SKY, PC001001: 0.8, PC001002: -0.6, PC02_01: 0.6, PC02_02: 0.8 }).wcs.cd;
    expect(zeros).toEqual([-0.0008, 0.0006, 0.0006, 0.0008]);
    expect(read([3, 2], { ...SKY, CROTA1: 10, CROTA2: 10 }).wcs.cd).toEqual(read([3, 2], { ...SKY, CROTA2: 10 }).wcs.cd);
  });
});

describe('what is not understood is named', () => {
  test.each<[string, readonly number[], Header, string]>([
    ['galactic axes', [3, 2], { ...SKY, CTYPE1: 'GLON-SIN', CTYPE2: 'GLAT-SIN' }, "CTYPE1 = 'GLON-SIN': not equatorial coordinates"],
    ['another projection', [3, 2], { ...SKY, CTYPE1: 'RA---ZEA', CTYPE2: 'DEC--ZEA' }, "CTYPE1 = 'RA---ZEA': projection ZEA; allowed: RA and DEC in the projections TAN and SIN"],
    ['distortion', [3, 2], { ...SKY, CTYPE1: 'RA---TAN-SIP', CTYPE2: 'DEC--TAN-SIP' }, "CTYPE1 = 'RA---TAN-SIP': projection TAN-SIP"],
    ['two projections', [3, 2], { ...SKY, CTYPE2: 'DEC--TAN' }, 'differ in projection'],
    ['no coordinates', [3, 2], {}, "0 axes of RA among CTYPE1 = '', CTYPE2 = ''"],
    ['no Dec', [3, 2], { ...SKY, CTYPE2: 'FREQ' }, '0 axes of DEC'],
    ['radians', [3, 2], { ...SKY, CUNIT1: 'rad' }, "CUNIT1 = 'rad'; allowed: deg"],
    ['B1950', [3, 2], { ...SKY, EQUINOX: 1950 }, 'RADESYS FK4, EQUINOX = 1950; allowed: ICRS, or FK5 of 2000'],
    ['FK5 of date', [3, 2], { ...SKY, RADESYS: 'FK5', EQUINOX: 2015.5 }, 'EQUINOX = 2015.5; allowed: 2000'],
    ['slant SIN', [3, 2], { ...SKY, PV2_1: 0.1 }, 'PV2_1 = 0.1: a SIN projection with parameters'],
    ['another pole', [3, 2], { ...SKY, LONPOLE: 90 }, 'LONPOLE = 90; allowed: 180'],
    ['beyond the pole', [3, 2], { ...SKY, CRVAL2: 95 }, 'CRVAL2 = 95; allowed: -90 to 90'],
    ['no pixel size', [3, 2], { ...SKY, CDELT1: 0 }, 'the pixels have no area'],
    ['velocities', [3, 2, 2], { ...SKY, CTYPE3: 'VRAD' }, "CTYPE3 = 'VRAD' for an axis of 2; allowed beside RA and Dec"],
    ['an unnamed axis', [3, 2, 2], SKY, 'CTYPE3 is missing for an axis of 2'],
    ['a frequency law', [3, 2, 2], { ...FREQ, CTYPE3: 'FREQ-LOG' }, "CTYPE3 = 'FREQ-LOG'; allowed: FREQ, FREQ-TAB"],
    ['frequency in km', [3, 2, 2], { ...FREQ, CUNIT3: 'km' }, "CUNIT3 = 'km'; allowed: Hz, kHz, MHz, GHz"],
    ['frequencies below 0', [3, 2, 20], FREQ, 'axis 3 (FREQ) runs through '],
    ['no step in frequency', [3, 2, 2], { ...FREQ, CDELT3: 0 }, 'axis 3 (FREQ) has step 0: CDELT3 or CD3_3'],
    ['correlations', [3, 2, 2], { ...SKY, CTYPE3: 'STOKES', CRVAL3: -1, CRPIX3: 1, CDELT3: -1 }, 'has code -1; allowed: 1 to 4 (I, Q, U, V)'],
    ['five Stokes', [3, 2, 2], { ...SKY, CTYPE3: 'STOKES', CRVAL3: 4, CRPIX3: 1, CDELT3: 1 }, 'plane 2 of axis 3 (STOKES) has code 5'],
    ['depth in Hz', [3, 2, 2], { ...SKY, CTYPE3: 'FDEP', CUNIT3: 'Hz' }, "CUNIT3 = 'Hz'; allowed: rad/m2"],
    ['CD and PC', [3, 2], { ...SKY, CD1_1: 1, PC1_1: 1 }, 'both CDi_j and PCi_j'],
    ['CROTA and PC', [3, 2], { ...SKY, CROTA2: 3, PC1_1: 1 }, 'both CROTA and PCi_j'],
    ['CROTA elsewhere', [3, 2], { ...SKY, CROTA1: 3 }, 'CROTA1 = 3; a rotation is allowed on the Dec axis alone'],
    ['coupled axes', [3, 2, 2], { ...FREQ, PC3_1: 0.1 }, 'axis 3 (FREQ) turns with pixel axis 1'],
    ['five axes', [1, 1, 1, 1, 2], SKY, 'NAXIS = 5; allowed: 2 to 4'],
    ['no text', [3, 2], { ...SKY, CTYPE1: 7 }, 'CTYPE1 = 7 is no text in quotes'],
    ['half a beam', [3, 2], { ...SKY, BMAJ: 0.1 }, 'BMAJ = 0.1, BMIN = 0; allowed'],
    ['a beam without angle', [3, 2], { ...SKY, BMAJ: 0.2, BMIN: 0.1 }, 'BPA is missing'],
    ['many beams', [3, 2], { ...SKY, CHANMBM: true }, 'each channel has a beam of its own'],
    ['another convention', [3, 2], { ...SKY, POLCCONV: 'MINE' }, "POLCCONV = 'MINE'; allowed: IAU, COSMO"],
    ['a width below 0', [3, 2, 2], { ...FREQ, CHANWID: -1 }, 'the width of a channel is -1 Hz'],
  ])('%s', (_, shape, header, message) => {
    expect(() => read(shape, header)).toThrow(InputError);
    expect(() => read(shape, header)).toThrow(/^f: HDU 0 \(primary\): /);
    expect(() => read(shape, header)).toThrow(message);
  });
});
