import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { gzipSync } from 'node:zlib';
import fc from 'fast-check';
import { describe, expect, test } from 'vitest';
import { readFits } from '../../src/files/fits-read.ts';
import { tableNumbers, tableTexts } from '../../src/files/fits-table.ts';
import type { FitsHdu, ImageHdu, TableHdu } from '../../src/files/fits-types.ts';
import { fitsPlace } from '../../src/files/fits-types.ts';
import { makeImage, writeFits } from '../../src/files/fits-write.ts';
import { gunzip } from '../../src/files/gunzip.ts';
import { InputError } from '../../src/units/input-error.ts';
import { inFolder, needPython, pythonJson } from '../support/tools.ts';

function getImage(hdu: FitsHdu | undefined): ImageHdu {
  if (hdu?.kind !== 'image') throw new Error('no image');
  return hdu;
}

function getTable(hdu: FitsHdu | undefined): TableHdu {
  if (hdu?.kind !== 'table') throw new Error('no table');
  return hdu;
}

/** Files by astropy, and the values it reads back from them itself. */
const WRITE = `
import sys, json, warnings
import numpy as np
from astropy.io import fits
folder = sys.argv[1]
warnings.simplefilter('ignore')
out = {}
def clean(a): return [None if np.isnan(x) else float(x) for x in np.ravel(np.asarray(a, dtype=float))]
def keep(name, hdus, i=0):
    path = f'{folder}/{name}'
    fits.HDUList(hdus).writeto(path, checksum=True)
    with fits.open(path) as h: out[name] = {'values': clean(h[i].data), 'shape': list(h[i].data.shape)[::-1]}
rng = np.random.default_rng(5)
for code, bitpix in (('u1', 8), ('i2', 16), ('i4', 32), ('i8', 64), ('f4', -32), ('f8', -64)):
    raw = (rng.normal(size=(2, 3, 4, 5)) * 40 + 100).astype(code)
    raw.flat[7] = raw.flat[9] = 55
    keep(f'plain{bitpix}.fits', [fits.PrimaryHDU(raw)])
    h = fits.PrimaryHDU(raw.copy())
    h.header['BSCALE'] = 0.25; h.header['BZERO'] = -3.5
    if bitpix > 0:
        h.header['BLANK'] = int(raw.flat[7])
    else: raw.flat[7] = np.nan
    path = f'{folder}/scaled{bitpix}.fits'
    # As raw bytes, for astropy would otherwise scale the values anew.
    pad = lambda b, c: b + c * (-len(b) % 2880)
    open(path, 'wb').write(pad(h.header.tostring().encode(), b' ') + pad(raw.astype('>' + code).tobytes(), b'\\0'))
    want = raw.astype(float) * 0.25 - 3.5
    if bitpix > 0: want[raw == raw.flat[7]] = np.nan
    out[f'scaled{bitpix}.fits'] = {'values': clean(want), 'shape': [5, 4, 3, 2]}
    with fits.open(path) as h2: np.testing.assert_allclose(h2[0].data, want, rtol=1e-6)
keep('unsigned.fits', [fits.PrimaryHDU(np.array([[0, 1], [2**63, 2**53 + 2]], dtype='u8'))])
keep('packed.fits.gz', [fits.PrimaryHDU(rng.normal(size=(200, 300)))])
keep('second.fits', [fits.PrimaryHDU(), fits.ImageHDU(np.arange(6.).reshape(2, 3), name='SECOND'), fits.ImageHDU(name='EMPTY')], 1)
h = fits.PrimaryHDU(np.zeros((1, 1)))
h.header['LONGTEXT'] = "it's " * 40 + 'end'
h.header['HIERARCH very long keyword'] = 3
h.header['HISTORY'] = 'h' * 100
keep('cards.fits', [h])
c = fits.Column
t = fits.BinTableHDU.from_columns([
    c('TEXT', '7A', array=['ab', '', 'sevench']), c('SHORT', 'I', array=[1, -2, 3], null=-2), c('UNSIGNED', 'J', bzero=2**31, array=np.array([0, 1, 2**32 - 1], dtype='u4')),
    c('BITS', '11X', array=np.ones((3, 11), dtype=bool)), c('LONG', 'K', array=[1, 2, 2**40]), c('VARIABLE', 'PD()', array=[[1.], [1., 2.], []]),
    c('CUBE', '6D', dim='(3,2)', unit='Jy', array=np.arange(18.).reshape(3, 2, 3)), c('FLAG', 'L', array=[True, False, True]), c('SINGLE', 'E', array=[.5, 1.5, np.nan])], name='MIXED')
text = fits.TableHDU.from_columns([c('A', 'I4', array=[1, 2])], name='ASCII')
fits.HDUList([fits.PrimaryHDU(), t, text, fits.ImageHDU(np.ones((1, 1)))]).writeto(f'{folder}/tables.fits')
fits.HDUList([fits.PrimaryHDU(), fits.CompImageHDU(np.zeros((20, 20), dtype='i4'))]).writeto(f'{folder}/tiles.fits')
print(json.dumps(out))
`;

interface Written {
  readonly expected: Readonly<Record<string, { readonly values: (number | null)[]; readonly shape: number[] }>>;
  readonly bytes: (name: string) => Uint8Array;
}

let written: Written | undefined;

/** The files, made once. */
function files(): Written {
  written ??= inFolder((folder) => {
    const expected = pythonJson(WRITE, [folder]) as Written['expected'];
    const names = [...Object.keys(expected), 'tables.fits', 'tiles.fits'];
    const all = new Map(names.map((name) => [name, new Uint8Array(readFileSync(join(folder, name)))]));
    return { expected, bytes: (name) => all.get(name) ?? new Uint8Array() };
  });
  return written;
}

const withNull = (values: Float64Array): (number | null)[] => Array.from(values, (value) => (Number.isNaN(value) ? null : value));

test('images by astropy in every BITPIX, with and without BSCALE, BZERO, BLANK, packed, in an extension', (context) => {
  needPython(context, 'astropy', 'numpy');
  const { expected, bytes } = files();
  expect(Object.keys(expected)).toHaveLength(16);
  for (const [name, want] of Object.entries(expected)) {
    const images = readFits(bytes(name), name).filter((hdu) => hdu.kind === 'image' && hdu.values.length > 0);
    const image = getImage(images[0]);
    expect(image.shape, name).toEqual(want.shape);
    expect(withNull(image.values), name).toEqual(want.values);
    // astropy's own checksums hold by our arithmetic.
    expect(image.notes, name).toEqual([]);
  }
});

test('long strings are joined, HIERARCH left out, tables decoded column by column', (context) => {
  needPython(context, 'astropy', 'numpy');
  const { cards } = readFits(files().bytes('cards.fits'), 'c')[0];
  expect(cards.find((card) => card.keyword === 'LONGTEXT')?.value).toBe(`${"it's ".repeat(40)}end`);
  expect(cards.filter((card) => card.keyword === 'HISTORY')).toHaveLength(2);
  expect(cards.some((card) => card.keyword.startsWith('HIER'))).toBe(false);

  const hdus = readFits(files().bytes('tables.fits'), 't');
  expect(hdus.map((hdu) => hdu.kind)).toEqual(['image', 'table', 'other', 'image']);
  const table = getTable(hdus[1]);
  const place = fitsPlace('t', 1, 'MIXED');
  expect(tableTexts(table, 'TEXT', place)).toEqual(['ab', '', 'sevench']);
  expect(tableNumbers(table, 'short', place)).toEqual(Float64Array.of(1, NaN, 3));
  expect(tableNumbers(table, 'UNSIGNED', place)).toEqual(Float64Array.of(0, 1, 2 ** 32 - 1));
  expect(tableNumbers(table, 'LONG', place)).toEqual(Float64Array.of(1, 2, 2 ** 40));
  expect(tableNumbers(table, 'CUBE', place)).toEqual(Float64Array.from({ length: 18 }, (_, i) => i));
  expect(tableNumbers(table, 'SINGLE', place)).toEqual(Float64Array.of(0.5, 1.5, NaN));
  expect(table.columns.find((column) => column.name === 'CUBE')).toMatchObject({ unit: 'Jy', dimensions: [3, 2] });
  expect(() => tableNumbers(table, 'VARIABLE', place)).toThrow('column VARIABLE has format P; numbers are B, I, J, K, E or D');
  expect(() => tableTexts(table, 'TEXTS', place)).toThrow(/^t: HDU 1 \(MIXED\): no column TEXTS \(did you mean "TEXT"\?\)/);
});

test('a tile-compressed image is refused by name', (context) => {
  needPython(context, 'astropy', 'numpy');
  expect(() => readFits(files().bytes('tiles.fits'), 'tiles.fits')).toThrow(/^tiles\.fits: HDU 1.*ZIMAGE = T: a tile-compressed image/);
});

describe('gzip', () => {
  const plain = writeFits([makeImage([300, 200], Float64Array.from({ length: 60000 }, (_, i) => Math.sin(i * i)), -64)]);
  const half = 250_007;

  test('one member and several', () => {
    const several = Buffer.concat([gzipSync(plain.subarray(0, 7)), gzipSync(plain.subarray(7, half)), gzipSync(plain.subarray(half))]);
    for (const packed of [gzipSync(plain), several]) {
      expect(Buffer.compare(gunzip(new Uint8Array(packed), 'p'), plain)).toBe(0);
    }
  });

  test('a wrong CRC, a wrong length, a cut: each is an InputError', () => {
    const packed = new Uint8Array(gzipSync(plain));
    for (const fromEnd of [8, 4, 3000]) {
      const bad = packed.slice();
      bad[bad.length - fromEnd] ^= 0x10;
      expect(() => readFits(bad, 'x.fits.gz')).toThrow(/^x\.fits\.gz: the gzip file is cut or damaged/);
    }
    for (const length of [3, 10, 20, packed.length - 9, packed.length - 1]) {
      expect(() => readFits(packed.subarray(0, length), 'x')).toThrow(InputError);
    }
  });
});

test('any image: write, read, write, read', () => {
  const anyImage = fc.record({
    shape: fc.array(fc.integer({ min: 1, max: 4 }), { minLength: 1, maxLength: 4 }),
    seed: fc.array(fc.double(), { minLength: 1, maxLength: 20 }),
    bitpix: fc.constantFrom(-32 as const, -64 as const),
    comment: fc.string({ unit: 'grapheme-ascii', maxLength: 120 }),
  });
  fc.assert(
    fc.property(anyImage, ({ shape, seed, bitpix, comment }) => {
      const values = Float64Array.from({ length: shape.reduce((a, b) => a * b) }, (_, i) => seed[i % seed.length]);
      const first = writeFits([makeImage(shape, values, bitpix, [{ keyword: 'TEXT', value: comment.trimEnd() }]), makeImage([2], Float64Array.of(1, NaN), -32, [], 'B')]);
      const hdus = readFits(first, 'f').map(getImage);
      expect(hdus[0].shape).toEqual(shape);
      expect(hdus[0].values).toEqual(bitpix === -64 ? values : Float64Array.from(Float32Array.from(values)));
      expect(hdus[0].cards[0].value).toBe(comment.trimEnd());
      expect(hdus.flatMap((hdu) => hdu.notes)).toEqual([]);
      expect(Buffer.compare(writeFits(hdus), first)).toBe(0);
    }),
    { seed: 4, numRuns: 200 },
  );
});

describe('what is wrong is named with file, unit, keyword and value', () => {
  const good = writeFits([makeImage([3, 2], Float64Array.from([1, 2, 3, 4, 5, 6]), -64), makeImage([2], Float64Array.of(1, 2), -32, [], 'WEIGHT')]);

  function edited(from: string, to: string): Uint8Array {
    const text = Buffer.from(good).toString('latin1');
    if (!text.includes(from) || from.length !== to.length) throw new Error(`cannot edit ${from}`);
    return new Uint8Array(Buffer.from(text.replace(from, to), 'latin1'));
  }

  test.each([
    ['NAXIS   =                    2', 'NAXIS   =                 1000', 'HDU 0 (primary): NAXIS = 1000; allowed: a whole number 0 to 999'],
    ['NAXIS   =                    2', 'NAXIS   =                  2.5', 'HDU 0 (primary): NAXIS = 2.5; allowed: a whole number 0 to 999'],
    ['NAXIS1  =                    3', 'NAXIS1  =                   -3', 'HDU 0 (primary): NAXIS1 = -3; allowed: a whole number 0 to'],
    ['NAXIS1  =                    3', 'NAXIS1  =        4000000000000', 'NAXIS1 = 4000000000000, NAXIS2 = 2 need 64000000000000 bytes of data, but the file holds'],
    ['NAXIS2  =                    2', "NAXIS2  =                  '2'", "NAXIS2 = '2' is no number"],
    ['NAXIS2  =', 'NAXIS9  =', 'HDU 0 (primary): NAXIS2 is missing'],
    ['BITPIX  =                  -64', 'BITPIX  =                  -63', 'HDU 0 (primary): BITPIX = -63; allowed: 8, 16, 32, 64, -32, -64'],
    ['SIMPLE  =                    T', 'SIMPLE  =                    F', 'SIMPLE = F'],
    ['SIMPLE  =', 'SIMPLY  =', 'not a FITS file: it begins with "SIMPLY  = "'],
    ['XTENSION=', 'XTENSIOM=', 'HDU 1: byte 5760 begins no extension'],
    ['GCOUNT  =                    1', 'GCOUNT  =                    2', 'HDU 1 (WEIGHT): GCOUNT = 2'],
    ['END     ', 'EMD     ', 'HDU 0 (primary): card 37 of the header holds byte'],
    ['/ FITS standard', '/ FITS \u0007tandard', 'HDU 0 (primary): card 1 of the header holds byte 7'],
  ])('%s -> %s', (from, to, message) => {
    expect(() => readFits(edited(from, to), 'map.fits')).toThrow(InputError);
    expect(() => readFits(edited(from, to), 'map.fits')).toThrow(`map.fits: ${message.startsWith('NAXIS') ? 'HDU 0 (primary): ' : ''}`);
    expect(() => readFits(edited(from, to), 'map.fits')).toThrow(message);
  });

  test('cut files', () => {
    expect(() => readFits(new Uint8Array(), 'x')).toThrow('x: not a FITS file: it is empty');
    expect(() => readFits(good.subarray(0, 500), 'x')).toThrow('the header has no END card within the 500 bytes');
    expect(() => readFits(good.subarray(0, 2880 + 47), 'x')).toThrow('need 48 bytes of data, but the file holds 47: is it cut?');
    // Only the fill behind the last data is missing: nothing is lost.
    expect(readFits(good.subarray(0, good.length - 2800), 'x')).toHaveLength(2);
    expect(readFits(new Uint8Array([...good, ...new Uint8Array(100)]), 'x')).toHaveLength(2);
  });

  test('damaged data are noted by their DATASUM', () => {
    const bad = good.slice();
    bad[2880 + 5] ^= 1;
    expect(readFits(bad, 'x')[0].notes[0]).toMatch(/^HDU 0 \(primary\): DATASUM = .* changed or damaged$/);
  });
});

describe('what the writer refuses', () => {
  test.each([
    ['values that do not fill the shape', () => writeFits([makeImage([2, 2], new Float64Array(3), -32)])],
    ['cards of the layout', () => writeFits([makeImage([1], new Float64Array(1), -32, [{ keyword: 'NAXIS', value: 3 }])])],
    ['integers', () => writeFits([{ ...makeImage([1], new Float64Array(1), -32), bitpix: 16 }])],
    ['nothing', () => writeFits([])],
  ])('%s', (_, write) => {
    expect(write).toThrow(RangeError);
  });
});
