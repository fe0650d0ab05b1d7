import { readFileSync } from 'node:fs';
import { join } from 'node:path';
import { expect, it } from 'vitest';
import { csvNumbers, parseCsv } from '../../src/files/csv-parse.ts';
import { inFolder } from '../support/tools.ts';
import { gyrelight, namesIn } from './run.ts';

it('the example runs from face-on to edge-on, on coarser maps here: tables, strip of maps, sentences', () => {
  inFolder((folder) => {
    const coarse = ['--set', 'observation.image={pixels: 21, pixel: 35 arcsec}', '--set', 'numerics.tolerance=1e-3'];
    const { status, stdout, stderr } = gyrelight(['sweep', 'scenes/lantern-wheel/inclinations.sweep.yaml', '--out', join(folder, 'o'), '--json', '--quiet', ...coarse]);
    expect(status, stderr).toBe(0);
    const { rows, crossings } = JSON.parse(stdout) as { rows: number; crossings: string[] };
    expect(rows).toBe(54);
    expect(crossings.every((sentence) => /^(cored quadrupole|dipole|helical): the (near-far )?asymmetry at (L20|S13|C6) /.test(sentence))).toBe(true);
    expect(namesIn(join(folder, 'o'))).toEqual(expect.arrayContaining(['curves-galaxy-inclination.svg', 'report.html', 'strip.svg']));
    const table = parseCsv(readFileSync(join(folder, 'o/sweep.csv'), 'utf8'), 'sweep.csv');
    const asymmetry = csvNumbers(table, 'asymmetry_L20');
    // Face-on an axisymmetric scene has no azimuthal structure (design/physics.md section 8), but for the oval beam and the pixels: they are even.
    csvNumbers(table, 'galaxy.inclination').forEach((inclination, row) => {
      if (inclination === 0) expect(Math.abs(asymmetry[row])).toBeLessThan(1e-9);
    });
    expect(Math.max(...asymmetry.map(Math.abs))).toBeGreaterThan(0.1);
  });
});
