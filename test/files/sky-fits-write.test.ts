import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, test } from 'vitest';
import { findProvenance } from '../../src/files/fits-scene.ts';
import { readFits } from '../../src/files/fits-read.ts';
import { emptyPrimary, makeImage, writeFits } from '../../src/files/fits-write.ts';
import { makeTable } from '../../src/files/fits-table.ts';
import { depthCubeFits, mapFits, stokesFits } from '../../src/files/sky-fits-write.ts';
import { skyImageFromFits } from '../../src/files/sky-fits-read.ts';
import { sha256OfText } from '../../src/files/sha256.ts';
import type { StokesCube } from '../../src/sky/types.ts';
import { fitsVerdict, inFolder, needCommand, needPython, pythonJson } from '../support/tools.ts';
import { EVEN_CUBE, PROVENANCE, SCENE_TEXT, SINGLE_CUBE, UNEVEN_CUBE } from './samples.ts';

/** Ends in no ampersand, which astropy 5 cuts off. */
const LONG_TEXT = `${"it's long & ".repeat(20)}done`;
const plane = EVEN_CUBE.I.slice(0, 20);
const TILTED = { projection: 'TAN', raDeg: 10, decDeg: -40, crpixX: 2, crpixY: 3, cd: [-1e-3, 2e-4, 2e-4, 1e-3] } as const;
const DEPTHS = { firstDepthRadM2: -100, depthStepRadM2: 50, depthCount: 3, referenceLambdaM2: 0.05 };

/** One file of every kind that is written. */
const FILES: Readonly<Record<string, Uint8Array>> = {
  even: stokesFits(EVEN_CUBE, 'Q', PROVENANCE, 64),
  even32: stokesFits(EVEN_CUBE, 'I', PROVENANCE, 32),
  uneven: stokesFits(UNEVEN_CUBE, 'U', PROVENANCE, 64),
  single: stokesFits(SINGLE_CUBE, 'I', PROVENANCE, 64),
  map: mapFits(
    { quantity: 'RM', unit: 'rad/m2', sky: EVEN_CUBE.grid, values: plane, comments: ['Peak of the spectrum; µ is not ASCII.'] },
    PROVENANCE,
    32,
  ),
  tilted: mapFits(
    { quantity: 'P error', unit: 'Jy/beam', sky: { nx: 5, ny: 4, wcs: TILTED }, values: plane, band: 'C', frequencyHz: 4.8e9, beam: EVEN_CUBE.beam },
    PROVENANCE,
    64,
  ),
  depth: depthCubeFits({ quantity: 'F', unit: 'Jy/beam/rmsf', sky: EVEN_CUBE.grid, values: EVEN_CUBE.U, ...DEPTHS }, PROVENANCE, 64),
  tables: writeFits([
    emptyPrimary([{ keyword: 'LONGTEXT', value: LONG_TEXT }]),
    makeTable('MIXED', [
      { name: 'NAME', texts: ['a', '', 'longer text'] },
      { name: 'COUNT', letter: 'J', numbers: [1, -2, 2147483647] },
      { name: 'PAIR', unit: 'rad/m2', letter: 'D', repeat: 2, numbers: [1, 2, NaN, 4, 5, 6] },
    ]),
    makeImage([2, 2], Float64Array.of(1, 2, 3, NaN), -32, [], 'EXTRA'),
  ]),
};

test('fitsverify finds neither errors nor warnings', (context) => {
  needCommand(context, 'fitsverify');
  for (const [name, bytes] of Object.entries(FILES)) {
    expect(fitsVerdict(bytes), name).toContain('Verification found 0 warning(s) and 0 error(s)');
  }
});

/** Everything astropy finds in the files: checked by its own checksums, coordinates by wcslib. */
const READ_ALL = `
import sys, json, re, hashlib, warnings
import numpy as np
from astropy.io import fits
from astropy.wcs import WCS
warnings.simplefilter('error')
def clean(a): return [None if np.isnan(x) else float(x) for x in np.ravel(a)]
def unescape(lines):
    text = '\\n'.join(lines)
    text = re.sub(r'\\\\(\\n|\\\\|u[0-9a-f]{4})', lambda m: '' if m[1] == '\\n' else '\\\\' if m[1] == '\\\\' else chr(int(m[1][1:], 16)), text)
    return text.encode('utf-16', 'surrogatepass').decode('utf-16')
out = {}
for path in sys.argv[1:]:
    with fits.open(path, checksum=True) as hdus:
        hdus.verify('exception')
        one = {'extensions': [h.name for h in hdus]}
        p = hdus[0]
        if p.data is not None:
            w = WCS(p.header, hdus)
            pixels = [[2, 3, k + 1][:w.naxis] for k in range(p.data.shape[0] if w.naxis == 3 else 1)]
            one.update(shape=p.data.shape, dtype=p.data.dtype.newbyteorder('=').name, values=clean(p.data), unit=p.header.get('BUNIT'),
                world=np.array(w.all_pix2world(pixels, 1)).tolist(), units=[str(u) for u in w.wcs.cunit],
                beam=[p.header.get(k) for k in ('BMAJ', 'BMIN', 'BPA')], comments=' '.join(p.header['COMMENT']))
        else: one['long'] = p.header['LONGTEXT']
        if 'SCENE' in hdus:
            h = hdus['SCENE']
            text = unescape(list(h.data['LINE']))
            one.update(text=text, sha=h.header['SHA256'], actual=hashlib.sha256(text.encode()).hexdigest(), seed=h.header['SEED'], creator=h.header['CREATOR'])
        if 'MIXED' in hdus:
            t = hdus['MIXED'].data
            one.update(names=list(t['NAME']), counts=t['COUNT'].tolist(), pairs=clean(t['PAIR']), extra=clean(hdus['EXTRA'].data))
        out[path.split('/')[-1][:-5]] = one
print(json.dumps(out))
`;

interface AstropyFile {
  readonly extensions: string[];
  readonly shape: number[];
  readonly dtype: string;
  readonly values: (number | null)[];
  readonly unit: string;
  readonly world: number[][];
  readonly units: string[];
  readonly beam: (number | null)[];
  readonly comments: string;
  readonly text: string;
  readonly sha: string;
  readonly actual: string;
  readonly seed: number;
  readonly creator: string;
  readonly long: string;
  readonly names: string[];
  readonly counts: number[];
  readonly pairs: (number | null)[];
  readonly extra: (number | null)[];
}

const withNull = (values: Float64Array): (number | null)[] => Array.from(values, (value) => (Number.isNaN(value) ? null : value));

function expectNear(actual: readonly number[], expected: readonly number[], relative: number): void {
  expect(actual).toHaveLength(expected.length);
  actual.forEach((value, i) => expect(Math.abs(value - expected[i])).toBeLessThanOrEqual(relative * Math.abs(expected[i])));
}

test('astropy reads the same values, coordinates, beam and scene', (context) => {
  needPython(context, 'astropy', 'numpy');
  const read = inFolder((folder) => {
    const paths = Object.entries(FILES).map(([name, bytes]) => {
      writeFileSync(join(folder, `${name}.fits`), bytes);
      return join(folder, `${name}.fits`);
    });
    return pythonJson(READ_ALL, paths) as Record<string, AstropyFile>;
  });

  // Values and shapes: rows from the south, first axis last in numpy.
  expect(read.even.values).toEqual(withNull(EVEN_CUBE.Q));
  expect(read.even.shape).toEqual([3, 4, 5]);
  expect(read.even.dtype).toBe('float64');
  expect(read.even32.values).toEqual(Array.from(Float32Array.from(EVEN_CUBE.I)));
  expect(read.even32.dtype).toBe('float32');
  expect(read.uneven.values).toEqual(withNull(UNEVEN_CUBE.U));
  expect(read.map).toMatchObject({ shape: [4, 5], unit: 'rad/m2', beam: [null, null, null] });
  expect(read.depth.values).toEqual(withNull(EVEN_CUBE.U));

  // Frequencies, linear and by table, and Faraday depths.
  const third = (file: AstropyFile): number[] => file.world.map((point) => point[2]);
  expectNear(third(read.even), [1.3e9, 1.4e9, 1.5e9], 1e-15);
  expectNear(third(read.uneven), [1.3e9, 1.45e9, 4.8e9, 8.4e9], 1e-15);
  expectNear(third(read.single), [4.8e9], 1e-15);
  expect(third(read.depth)).toEqual([-100, -50, 0]);
  expect(read.depth.units).toEqual(['deg', 'deg', 'rad / m2']);
  expect(read.uneven.units).toEqual(['deg', 'deg', 'Hz']);

  // The sky: pixel (2, 3) is one pixel east and half a pixel north of the centre (150.1, 20.2) deg.
  const pixel = 3.3 / 3600;
  const [east, north] = [(pixel * Math.PI) / 180, (0.5 * pixel * Math.PI) / 180];
  const dec0 = (20.2 * Math.PI) / 180;
  // Orthographic projection (Calabretta & Greisen 2002, section 5.1.5), inverted in closed form.
  const w = Math.sqrt(1 - east ** 2 - north ** 2);
  const dec = Math.asin(north * Math.cos(dec0) + w * Math.sin(dec0));
  const ra = Math.atan2(east, w * Math.cos(dec0) - north * Math.sin(dec0));
  // 1e-12: rounding of angles of 150 degrees.
  expectNear(read.even.world[0].slice(0, 2), [150.1 + (ra * 180) / Math.PI, (dec * 180) / Math.PI], 1e-12);
  // The reference pixel of the tilted map is (2, 3).
  expectNear(read.tilted.world[0], [10, -40], 1e-14);

  // Beam in degrees, sign convention in words.
  expectNear(read.even.beam as number[], [15 / 3600, 12 / 3600, (0.5 * 180) / Math.PI], 1e-15);
  for (const name of ['even', 'map', 'depth']) {
    expect(read[name].comments).toMatch(/IAU \(1973\).*north through east.*Q = P cos 2 chi, U = P sin 2 chi/);
  }
  expect(read.map.comments).toContain('Peak of the spectrum; ');

  // The scene, and tables of other kinds.
  for (const name of Object.keys(FILES).filter((key) => key !== 'tables')) {
    expect(read[name].text).toBe(SCENE_TEXT);
    expect(read[name]).toMatchObject({ sha: sha256OfText(SCENE_TEXT), actual: sha256OfText(SCENE_TEXT), seed: 7, creator: 'gyrelight 0.1.0' });
  }
  expect(read.tables).toMatchObject({
    extensions: ['PRIMARY', 'MIXED', 'EXTRA'],
    long: LONG_TEXT,
    names: ['a', '', 'longer text'],
    counts: [1, -2, 2147483647],
    pairs: [1, 2, null, 4, 5, 6],
    extra: [1, 2, 3, null],
  });
});

describe('read back by this program', () => {
  test.each([
    ['even', EVEN_CUBE, 'Q'],
    ['uneven', UNEVEN_CUBE, 'U'],
    ['single', SINGLE_CUBE, 'I'],
  ] as const)('a cube is what it was: %s', (name, cube: StokesCube, stokes) => {
    const hdus = readFits(FILES[name], 'hidden');
    const image = skyImageFromFits(hdus, 'hidden');
    expect(image.values).toEqual(cube[stokes]);
    expect(image.channels).toEqual(cube.channels);
    expect(image.noise).toEqual(Array.from(cube.noise));
    expect(image).toMatchObject({ nx: 5, ny: 4, unit: 'Jy/beam', stokes: [stokes], quantity: stokes, band: 'L', convention: 'IAU', notes: [] });
    // The one rounding from arcsec to degrees and back.
    expectNear([image.pixelArcsec, image.beam?.majorArcsec ?? 0, image.beam?.minorArcsec ?? 0, image.beam?.angle ?? 0], [3.3, 15, 12, 0.5], 4e-16);
    expect(image.wcs).toMatchObject({ projection: 'SIN', raDeg: 150.1, decDeg: 20.2, crpixX: 3, crpixY: 2.5 });
    expect(findProvenance(hdus, 'hidden')).toEqual(PROVENANCE);
  });

  test('maps and depth cubes', () => {
    const depth = skyImageFromFits(readFits(FILES.depth, 'd'), 'd');
    expect(depth).toMatchObject({ depthsRadM2: [-100, -50, 0], quantity: 'F', stokes: [], values: EVEN_CUBE.U });
    expect(depth.channels).toBeUndefined();
    const tilted = skyImageFromFits(readFits(FILES.tilted, 't'), 't');
    expect(tilted).toMatchObject({ wcs: TILTED, channels: [{ frequencyHz: 4.8e9, widthHz: 0 }], quantity: 'P error', values: plane });
    expect(skyImageFromFits(readFits(FILES.map, 'm'), 'm').channels).toBeUndefined();
  });

  test('read, write, read: the same bytes', () => {
    for (const [name, bytes] of Object.entries(FILES)) {
      const hdus = readFits(bytes, name).flatMap((hdu) => (hdu.kind === 'other' ? [] : [hdu]));
      expect(Buffer.compare(writeFits(hdus), bytes), name).toBe(0);
    }
  });
});

test('a scene that was changed is refused', () => {
  const bytes = stokesFits(SINGLE_CUBE, 'I', PROVENANCE, 32);
  const at = Buffer.from(bytes).indexOf('axisymmetric-spiral');
  bytes[at] ^= 1;
  expect(() => findProvenance(readFits(bytes, 'x.fits'), 'x.fits')).toThrow(/^x\.fits: HDU 1 \(SCENE\): SHA256 = .* changed or damaged/);
});
