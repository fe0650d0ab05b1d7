import { Command } from 'commander';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { addMeasure } from '../../src/cli/measure.ts';
import { laws, sumsOfTwo } from '../../src/measure/laws/index.ts';
import { InputError } from '../../src/units/input-error.ts';
import { fitsVerdict, inFolder, needCommand, needPython, pythonJson, runPython } from '../support/tools.ts';
import { gyrelight, namesIn, smallScene, type Outcome } from './run.ts';

interface Summary {
  readonly layout: string;
  readonly bands: readonly { readonly rmGradient?: { readonly error: number } }[];
  readonly rmGradientChange?: { readonly error: number };
  readonly depthSpectrum: { readonly resolution: number };
  readonly rings: readonly { readonly quantity: string; readonly harmonics?: readonly { readonly order: number; readonly phaseDeg: number }[] }[];
  readonly integratedLaws: readonly { readonly law: string; readonly parameters: Readonly<Record<string, { readonly value: number; readonly error: number }>> }[];
  readonly files: readonly string[];
}

/** Q and U of a face-on disc behind a screen of depth 30 + 2 per kpc north, made with astropy; headers as many observers write them. */
const foreignMaps = `
import sys, numpy as np
from astropy.io import fits
n, pixel = 41, 10.0
y, x = np.mgrid[:n, :n] - 20.0
kpc = pixel/206264.80624709636*1e4
r = np.hypot(x, y)*kpc; phi = np.arctan2(-x, y)   # north through east, face-on, position angle 0
P = 1e-3*np.exp(-r/6); chi0 = phi + np.pi/2 - np.deg2rad(-20) + np.pi/2  # B = cos p phi-hat + sin p r-hat, E across it
for name, nus in (('low', np.linspace(1.3e9, 1.7e9, 9)), ('high', np.array([4.8e9]))):
    l2 = (299792458.0/nus)**2
    rm = 30 + 2*y*kpc
    angle = 2*(chi0[None] + rm[None]*l2[:, None, None])
    for s, plane in (('q', P*np.cos(angle)), ('u', -P*np.sin(angle)), ('i', 10*P + 0*angle)):
        h = fits.Header()
        h['CTYPE1']='RA---SIN'; h['CTYPE2']='DEC--SIN'; h['CRPIX1']=21.; h['CRPIX2']=21.; h['CRVAL1']=150.; h['CRVAL2']=20.
        h['CDELT1']=-pixel/3600; h['CDELT2']=pixel/3600; h['BUNIT']='JY/BEAM'; h['BMAJ']=20/3600; h['BMIN']=20/3600; h['BPA']=0.
        if name == 'low':
            h['CTYPE3']='FREQ'; h['CRPIX3']=1.; h['CRVAL3']=nus[0]; h['CDELT3']=nus[1]-nus[0]; h['CUNIT3']='Hz'
        fits.PrimaryHDU((plane if name == 'low' else plane[0]).astype('f4'), h).writeto(f'{sys.argv[1]}/{s}-{name}.fits')
`;

/** A folder with the small scene and its maps, made once for all tests that need some. */
let shared = '';

beforeAll(() => {
  shared = mkdtempSync(join(tmpdir(), 'gyrelight-measure-'));
  writeFileSync(join(shared, 's.yaml'), smallScene);
  expect(gyrelight(['map', 's.yaml', '--out', 'maps', '--quiet'], shared).status).toBe(0);
});

afterAll(() => rmSync(shared, { recursive: true, force: true }));

const ownMaps = ['low', 'high'].flatMap((band) => ['I', 'Q', 'U'].map((stokes) => `maps/${stokes}-${band}.fits`));
const ring = ['--radii', '4.3 kpc,5 kpc', '--sectors', '2'];

/** Everything asked of the small scene's maps at once; run when first needed. */
const everything = ['measure', ...ownMaps, '--galaxy', 's.yaml', '--laws', 'pixels', ...ring, '--thermal-fraction', '0.1', '--thermal-at', '1.4 GHz', '--deconvolve', '--origin'];
let wholeRun: Outcome | undefined;
const measureAll = (): Outcome => (wholeRun ??= gyrelight([...everything, '--out', 'whole'], shared));
const lies = ['--inclination', '0 deg', '--position-angle', '0 deg', '--distance', '10 Mpc'];

describe('gyrelight measure', () => {
  it('measures foreign maps: RM, field pitch, laws; tables with units that astropy reads, clean FITS', (context) => {
    needPython(context, 'astropy', 'numpy');
    needCommand(context, 'fitsverify');
    inFolder((folder) => {
      runPython(foreignMaps, [folder]);
      const maps = ['low', 'high'].flatMap((band) => ['i', 'q', 'u'].map((stokes) => `${stokes.toUpperCase()}=${stokes}-${band}.fits${band === 'high' ? '@4.8GHz' : ''}`));
      const { status, stderr, stdout } = gyrelight(['measure', ...maps, ...lies, '--convention', 'U-reversed', '--noise', '1 uJy/beam', '--radii', '2 kpc,5 kpc,8 kpc', '--sectors', '12', '--laws', 'integrated', '--sums', '--out', 'm'], folder);
      expect(stderr).not.toMatch(/Error/);
      expect(status).toBe(0);
      expect(stdout).toMatch(/resolution .* largest depth .* largest scale /);
      expect(stdout).toMatch(/threshold 5 times the noise: .* false peak with a chance of 0\.00/);
      for (const name of ['RM.fits', 'RM-error.fits', 'faraday-spectrum.fits', 'fieldAngle.fits', 'profiles.csv', 'laws.csv', 'summary.json', 'plots']) expect(namesIn(join(folder, 'm'))).toContain(name);
      for (const name of namesIn(join(folder, 'm')).filter((file) => file.endsWith('.fits'))) {
        expect(fitsVerdict(new Uint8Array(readFileSync(join(folder, 'm', name)))), name).toMatch(/found 0 warning.* and 0 error/);
      }
      const seen = pythonJson(
        `
import sys, json, numpy as np
from astropy.io import fits
from astropy.table import Table
t = Table.read(sys.argv[1]+'/profiles.csv', format='ascii.ecsv')
laws = Table.read(sys.argv[1]+'/laws.csv', format='ascii.ecsv')
rm = fits.getdata(sys.argv[1]+'/RM.fits'); h = fits.getheader(sys.argv[1]+'/faraday-spectrum.fits')
print(json.dumps(dict(units=[str(t[c].unit) for c in ('RM','P','azimuth','inner')], rows=len(t), rm=[float(rm[20,20]), float(rm[30,20])],
  pitch=[float(v) for v in t['pitch'][:24]], fraction=float(t['fraction'][0]), axis=h['CTYPE3'], first=str(laws['law'][0]))))
`,
        [join(folder, 'm')],
      ) as { units: string[]; rows: number; rm: number[]; pitch: number[]; fraction: number; axis: string };
      expect(seen.units).toEqual(['rad / m2', 'Jy / beam', 'deg', 'kpc']);
      expect(seen.rows).toBe(2 * 24);
      // 30 rad m^-2 at the centre, and 10 pixels of 0.485 kpc north of it: the peak's parabola errs by 0.1 % of the resolution.
      expect(Math.abs(seen.rm[0] - 30)).toBeLessThan(0.5);
      expect(Math.abs(seen.rm[1] - (30 + 2 * 4.848))).toBeLessThan(0.5);
      // The pitch put in; pixels weigh unevenly in a sector.
      for (const pitch of seen.pitch) expect(Math.abs(pitch + 20)).toBeLessThan(0.5);
      expect(Math.abs(seen.fraction - 0.1)).toBeLessThan(1e-4);
      expect(seen.axis).toBe('FDEP');
      const summary = JSON.parse(readFileSync(join(folder, 'm', 'summary.json'), 'utf8')) as Summary;
      expect(summary.integratedLaws.map(({ law }) => law)).toEqual(expect.arrayContaining([...laws, ...sumsOfTwo].map(({ name }) => name)));
      const rm = summary.rings.filter(({ quantity }) => quantity === 'RM');
      expect(rm.length).toBe(2);
      // It grows north: position angle 0, azimuth 0.
      for (const { harmonics } of rm) expect(Math.min(harmonics?.[0].phaseDeg ?? NaN, 360 - (harmonics?.[0].phaseDeg ?? NaN))).toBeLessThan(3);
    });
  });

  it("measures this program's own maps, whose headers say all", () => {
    const { status, stdout, stderr } = measureAll();
    expect(stderr).not.toMatch(/Error/);
    expect(status).toBe(0);
    const text = readFileSync(join(shared, 'whole', 'summary.json'), 'utf8');
    const summary = JSON.parse(text) as Summary;
    expect(summary.layout).toBe('rings');
    expect(summary.integratedLaws.length).toBe(laws.length);
    expect(namesIn(join(shared, 'whole', 'laws'))).toEqual(expect.arrayContaining(['best.fits', 'p.fits', 'p-error.fits', 'lead.fits']));
    expect(readFileSync(join(shared, 'whole', 'origin.csv'), 'utf8')).toMatch(/^low,1400000000,4.3,5,0,nan,-?\d/m);
    for (const name of ['originMedian', 'originLow', 'originHigh', 'nearShare', 'cancelledShare']) expect(namesIn(join(shared, 'whole'))).toContain(`${name}-high.fits`);
    // Both bands have an RM of their own: its gradient, and the change of that with wavelength, each with an error.
    expect(summary.bands.map(({ rmGradient }) => (rmGradient?.error ?? 0) > 0)).toEqual([true, true]);
    expect(summary.rmGradientChange?.error).toBeGreaterThan(0);
    // One number with an error in the terminal, too.
    expect(stdout).toMatch(/RM gradient along 25 deg, low: \S+ \+- \S+ rad\/m\^2 per kpc\n.*high: .*\nits change with wavelength: \S+ \+- \S+ rad/);
    expect(summary.files).toEqual(expect.arrayContaining(['faraday-spectrum.fits', 'laws/best.fits', 'originMedian-low.fits']));
  });

  it('reads maps beyond --memory by rows: the same maps, profiles and laws', () => {
    const whole = measureAll();
    const rows = gyrelight([...everything, '--memory', '0.1', '--json', '--out', 'rows'], shared);
    expect([whole.status, rows.status]).toEqual([0, 0]);
    expect(whole.stdout).not.toMatch(/rows are read/);
    expect(rows.stderr).toMatch(/the maps are large \(--memory\): their rows are read/);
    // With --json the summary alone is on stdout.
    expect(rows.stdout).toBe(readFileSync(join(shared, 'rows', 'summary.json'), 'utf8'));
    const names = namesIn(join(shared, 'whole'));
    expect(namesIn(join(shared, 'rows'))).toEqual(names);
    const files = [...names.filter((name) => name.endsWith('.fits')), ...namesIn(join(shared, 'whole', 'laws')).map((name) => join('laws', name))];
    expect(files.length).toBeGreaterThan(15);
    for (const name of files) {
      const [a, b] = ['whole', 'rows'].map((out) => readFileSync(join(shared, out, name)));
      // The tables of provenance tell the two commands apart; the data stand before them, behind a header of one length.
      const data = (bytes: Buffer): Buffer => bytes.subarray(5760, bytes.indexOf('XTENSION') - 2880);
      expect(data(a).equals(data(b)), name).toBe(true);
    }
    for (const name of ['profiles.csv', 'laws.csv', 'origin.csv', 'summary.json']) expect(readFileSync(join(shared, 'rows', name), 'utf8'), name).toBe(readFileSync(join(shared, 'whole', name), 'utf8'));
  });

  it('smooths large maps plane by plane, to single precision the same', (context) => {
    needPython(context, 'astropy', 'numpy');
    const common = ['measure', 'maps/Q-low.fits', 'maps/U-low.fits', '--galaxy', 's.yaml', '--laws', 'integrated', ...ring, '--smooth', '90 arcsec'];
    expect(gyrelight([...common, '--out', 'smooth'], shared).status).toBe(0);
    const rows = gyrelight([...common, '--memory', '0.1', '--out', 'smooth-rows'], shared);
    expect(rows.status).toBe(0);
    expect(rows.stdout).toMatch(/smoothed to 90 x 90 arcsec; its noise becomes/);
    const worst = pythonJson(
      `
import sys, json, numpy as np
from astropy.io import fits
from astropy.table import Table
a, b = [fits.getdata(f'{sys.argv[1]}/{d}/faraday-spectrum.fits') for d in ('smooth', 'smooth-rows')]
p, q = [Table.read(f'{sys.argv[1]}/{d}/laws.csv', format='ascii.ecsv')['chi2'] for d in ('smooth', 'smooth-rows')]
print(json.dumps([float(np.abs(a - b).max() / a.max()), float(np.abs(p / q - 1).max())]))
`,
      [shared],
    ) as [number, number];
    // Six digits of single precision; chi^2 of signal to noise 100 feels them a hundredfold.
    expect(worst[0]).toBeLessThan(3e-7);
    expect(worst[1]).toBeLessThan(1e-3);
  });

  it('cuts a disc near edge-on into strips', () => {
    const { status, stdout } = gyrelight(['measure', 'maps/Q-low.fits', 'maps/U-low.fits', '--inclination', '88 deg', '--position-angle', '25 deg', '--distance', '10 Mpc', '--laws', 'none', '--json', '--out', 'strips'], shared);
    expect(status).toBe(0);
    expect((JSON.parse(stdout) as Summary).layout).toBe('strips');
    expect(readFileSync(join(shared, 'strips', 'profiles.csv'), 'utf8')).toMatch(/^band,frequency,from,to,across,/m);
  });

  it('refuses bad input with words: exit 2, nothing written, no stack', async () => {
    const before = namesIn(shared);
    const [Q, U, scene] = ['maps/Q-low.fits', 'maps/U-low.fits', 's.yaml'].map((name) => join(shared, name));
    const cases: readonly (readonly [readonly string[], RegExp])[] = [
      [[Q, U], /--inclination.*not known/],
      [[Q, U, '--galaxy', scene, '--distance', '3 Mpc'], /leave --distance out/],
      [[Q, U, ...lies, '--origin'], /--origin: .*--galaxy SCENE/],
      [[Q, '--galaxy', scene], /no Stokes U goes with it/],
      [[Q, U, U, '--galaxy', scene], /given twice/],
      [[Q, join(shared, 'nowhere.fits'), '--galaxy', scene], /no such file/],
      [[Q, scene, '--galaxy', scene], /not a FITS file/],
      [[join(shared, 'maps/RM.fits'), '--galaxy', scene], /Stokes/],
      [[Q, U, '--galaxy', scene, '--radii', '4 kpc,2 kpc'], /rise/],
      [[Q, U, '--galaxy', scene, '--radii', '4,2'], /--radii 4,2: .*unit/],
      [[Q, U, '--galaxy', scene, '--sectors', '0'], /--sectors 0/],
      [[Q, U, '--galaxy', scene, '--depths', '1 rad/m^2'], /--depths/],
      [[Q, U, '--galaxy', scene, '--smooth', '10 arcsec'], /narrower/],
      [[Q, U, '--galaxy', scene, '--thermal-fraction', '2'], /--thermal-fraction 2/],
      [[Q, U, '--galaxy', scene, '--noise', '1 kpc'], /--noise 1 kpc/],
      [[Q, '--galaxy', scene, '--memory', '0.1'], /no Stokes U goes with it/],
      [[Q, U, '--inclination', '40 deg', '--position-angle', '0 deg', '--distance', '10 Mpc', '--centre', '10 deg,10 deg'], /no pixel of the maps/],
    ];
    for (const [parameters, pattern] of cases) {
      const program = new Command().exitOverride();
      addMeasure(program);
      const run = program.parseAsync(['measure', ...parameters, '--out', join(shared, 'refused'), '--quiet'], { from: 'user' });
      await expect(run, parameters.join(' ')).rejects.toThrow(pattern);
      await expect(run).rejects.toBeInstanceOf(InputError);
    }
    const { status, stderr } = gyrelight(['measure', 'maps/Q-low.fits', '--galaxy', 's.yaml', '--out', 'refused', '--quiet'], shared);
    expect(status).toBe(2);
    expect(stderr).toMatch(/no Stokes U goes with it/);
    expect(stderr).not.toMatch(/\n\s+at /);
    expect(namesIn(shared)).toEqual(before);
  });
});
