import { spawn } from 'node:child_process';
import { copyFileSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { fitsVerdict, inFolder, needCommand, needPython, pythonJson } from '../support/tools.ts';
import { gyrelight, namesIn, repository } from './run.ts';

const example = (name: string): string => repository(`scenes/lantern-wheel/${name}`);
const coarse = ['--set', 'grid.radial=24', '--set', 'grid.vertical=32', '--set', 'solve.modes=1', '--set', 'solve.tolerance=0.2', '--set', 'solve.parity=even'];

interface Summary {
  readonly grids: { readonly coarse: object; readonly fine: object };
  readonly modes: readonly { readonly parity: string; readonly growthRatePerGyr: { readonly fine: number; readonly coarse: number; readonly error: number }; readonly eFoldingMyr: number; readonly oscillates: boolean }[];
  readonly field: { readonly state: string; readonly parity: string; readonly azimuthalUG: number; readonly errorByGrid: { readonly azimuthal: number } };
  readonly thinDisc: readonly unknown[];
  readonly specSha256: string;
}

/** The example beside its rotation curve in a folder of its own. */
function inExample(work: (folder: string) => void): void {
  inFolder((folder) => {
    for (const name of ['lantern-wheel.dynamo.yaml', 'rotation.csv', 'mean-field.scene.yaml']) copyFileSync(example(name), join(folder, name));
    work(folder);
  });
}

describe('gyrelight dynamo', () => {
  it('leads from a rotation curve and a wind speed to a polarization map in two commands', (context) => {
    needCommand(context, 'fitsverify');
    needPython(context, 'astropy', 'numpy');
    inExample((folder) => {
      const scene = readFileSync(join(folder, 'mean-field.scene.yaml'), 'utf8').replace('../../out/dynamo', 'solved').replace('pixels: 61, pixel: 12', 'pixels: 15, pixel: 48').replace(/beam: .*/, '');
      writeFileSync(join(folder, 'scene.yaml'), scene);
      const solved = gyrelight(['dynamo', 'lantern-wheel.dynamo.yaml', '--out', 'solved', ...coarse], folder);
      expect(solved.stderr).not.toMatch(/gyrelight:/);
      expect(solved.status).toBe(0);
      expect(solved.stdout).toMatch(/^parity +growth rate/m);
      expect(solved.stdout).toMatch(/^even +\d\.\d+ \/Gyr +\d+ Myr  no/m);
      expect(solved.stdout).toMatch(/One-dimensional limit[^]*r = 8 kpc/);
      expect(namesIn(join(folder, 'solved'))).toEqual(['field.fits', 'overview.svg', 'summary.json']);
      const mapped = gyrelight(['map', 'scene.yaml', '--out', 'maps'], folder);
      expect(mapped.stderr).not.toMatch(/gyrelight:/);
      expect(mapped.status).toBe(0);
      expect(namesIn(join(folder, 'maps'))).toContain('Q-L20.fits');

      // The field file: clean, and in astropy as this program's documents say.
      expect(fitsVerdict(new Uint8Array(readFileSync(join(folder, 'solved/field.fits'))))).toMatch(/found 0 warning.* and 0 error/);
      const seen = pythonJson(astropyView, [join(folder, 'solved/field.fits')]) as Record<string, unknown>;
      expect(seen.names).toEqual(['A_PHI', 'B_PHI', 'SCENE']);
      expect(seen.shapes).toEqual([[65, 25], [65, 25]]);
      expect(seen.units).toEqual(['kpc uG', 'uG']);
      expect(seen.corner).toEqual([0, -6]);
      const summary = JSON.parse(readFileSync(join(folder, 'solved/summary.json'), 'utf8')) as Summary;
      expect(seen.sha).toBe(summary.specSha256);
      expect(Math.abs(Number(seen.strongest) / summary.field.azimuthalUG - 1)).toBeLessThan(1e-12);
      // The table holds the rotation curve itself: the field can be made again from its file alone.
      expect(seen.scene).toMatch(/radius:[^]*0\.5 kpc[^]*speed:[^]*62 km\/s/);
      writeFileSync(join(folder, 'again.yaml'), String(seen.scene));
      rmSync(join(folder, 'rotation.csv'));
      expect(gyrelight(['dynamo', 'again.yaml', '--out', 'again', '--quiet'], folder).status).toBe(0);
      const again = pythonJson(astropyView, [join(folder, 'again/field.fits')]) as Record<string, unknown>;
      expect(again.strongest).toBe(seen.strongest);

      // Even, growing, steady; on two grids with what they leave uncertain.
      expect(summary.grids).toEqual({ coarse: { radial: 12, vertical: 16 }, fine: { radial: 24, vertical: 32 } });
      const [mode] = summary.modes;
      expect(mode.growthRatePerGyr.fine).toBeGreaterThan(0);
      expect(Math.abs(mode.eFoldingMyr * mode.growthRatePerGyr.fine - 1000)).toBeLessThan(1e-6);
      expect(mode.oscillates).toBe(false);
      expect(Math.abs(mode.growthRatePerGyr.error - Math.abs(mode.growthRatePerGyr.fine - mode.growthRatePerGyr.coarse) / 3)).toBeLessThan(1e-12);
      expect(summary.field).toMatchObject({ state: 'saturated', parity: 'even' });
      expect(summary.field.errorByGrid.azimuthal).toBeLessThan(0.2);
      expect(summary.thinDisc).toHaveLength(3);
    });
  });

  it('writes the fastest mode at a strength of the user’s choice', () => {
    inExample((folder) => {
      const { status, stdout } = gyrelight(['dynamo', 'lantern-wheel.dynamo.yaml', '--out', 'o', '--json', ...coarse, '--set', 'solve.state=mode', '--set', 'solve.strength=7 uG'], folder);
      expect(status).toBe(0);
      expect(Math.abs((JSON.parse(stdout) as Summary).field.azimuthalUG / 7 - 1)).toBeLessThan(1e-12);
    });
  });

  it.each([
    ['what has not converged, with the numbers and a grid', ['--set', 'grid.radial=16', '--set', 'grid.vertical=16', '--set', 'solve.modes=1', '--set', 'solve.parity=even', '--set', 'solve.tolerance=0.001'], /not converged: on grids of 8 x 8 and 16 x 16 cells .* an error of [\d.]+ % where 0\.10 % is allowed \(solve\.tolerance\).*grid: \{radial: \d+, vertical: \d+\} should do/],
    ['a field that decays', [...coarse, '--set', 'alpha=0 km/s'], /every field decays, the slowest \(even\) at -[\d.]+ per Gyr, so there is no saturated one.*state: mode/],
    ['a grid beyond the memory', ['--set', 'grid.radial=1000', '--set', 'grid.vertical=1000'], /a grid of 1000 x 1000 cells needs up to [\d.]+ GiB of memory; at most 4\.00 GiB are allowed/],
    ['a rotation curve that is not there', ['--set', 'rotation.file=rotatoin.csv'], /there is no such file \(did you mean "rotation\.csv"\?\)/],
    ['a key that is none', ['--set', 'wind.sped=3 km/s'], /--set wind\.sped=3 km\/s: wind: unknown key "sped" \(did you mean "speed"\?\)/],
  ])('refuses %s, and writes nothing', (_, parameters, message) => {
    inExample((folder) => {
      const before = namesIn(folder);
      const { status, stderr } = gyrelight(['dynamo', 'lantern-wheel.dynamo.yaml', '--out', 'o', '--quiet', ...parameters], folder);
      expect(stderr).toMatch(message);
      expect(status).toBe(2);
      expect(namesIn(folder)).toEqual(before);
    });
  });

  it('stops at Ctrl-C and leaves nothing half-written', async () => {
    const folder = mkdtempSync(join(tmpdir(), 'gyrelight-dynamo-'));
    try {
      const run = spawn(process.execPath, [repository('dist/gyrelight.js'), 'dynamo', example('lantern-wheel.dynamo.yaml'), '--out', 'o', '--set', 'grid.radial=60', '--set', 'grid.vertical=100'], { cwd: folder });
      let said = '';
      run.stderr.on('data', (chunk: Buffer) => (said += chunk.toString()));
      const ended = new Promise<number | null>((resolve) => run.once('exit', resolve));
      await new Promise((resolve) => setTimeout(resolve, 2000));
      expect(run.exitCode, said).toBe(null);
      run.kill('SIGINT');
      expect(await ended).toBe(130);
      expect(said).toMatch(/stopped; nothing half-written was left/);
      expect(namesIn(folder)).toEqual([]);
    } finally {
      rmSync(folder, { recursive: true, force: true });
    }
  });
});

const astropyView = `
import sys, json, numpy as np
from astropy.io import fits
from astropy.wcs import WCS
import astropy.units as u
hdus = fits.open(sys.argv[1])
wcs = WCS(hdus[1].header)
print(json.dumps({
  'names': [h.name for h in hdus],
  'shapes': [list(h.data.shape) for h in hdus[:2]],
  'units': [str(u.Unit(h.header['BUNIT'])) for h in hdus[:2]],
  'corner': [round(float(v), 12) for v in wcs.wcs_pix2world([[1, 1]], 1)[0]],
  'strongest': float(np.abs(hdus[1].data).max()),
  'sha': hdus[2].header['SHA256'],
  'scene': '\\n'.join(str(row[0]) for row in hdus[2].data),
}))
`;
