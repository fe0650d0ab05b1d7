import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { describe, expect, it } from 'vitest';
import { csvNumbers, parseCsv } from '../../src/files/csv-parse.ts';
import { inFolder, needPython, pythonJson } from '../support/tools.ts';
import { gyrelight, smallScene } from './run.ts';

const formulaScene = smallScene.replace(
  /field:\n.*\n.*\n/,
  'field:\n  - {model: formula, name: mine, parameters: {q: 20 uG kpc^2, a: 2 kpc}, potential: {phi: "q*r*z/(r^2+z^2+a^2)^1.5"}}\n',
);

describe('gyrelight probe', () => {
  it('gives the field of an inline formula, checked against its derivatives by hand', () => {
    inFolder((folder) => {
      writeFileSync(join(folder, 's.yaml'), formulaScene);
      writeFileSync(join(folder, 'p.csv'), 'x,y,z\n3,1,0.5\n-2,4,-1\n0,0,1\n');
      const { status } = gyrelight(['probe', 's.yaml', '--points', 'p.csv', '--table', 'v.csv'], folder);
      expect(status).toBe(0);
      const table = parseCsv(readFileSync(join(folder, 'v.csv'), 'utf8'), 'v.csv');
      const [x, y, z, Bx, By, Bz, ne, C, divB] = ['x', 'y', 'z', 'Bx', 'By', 'Bz', 'ne', 'C', 'divB'].map((name) => csvNumbers(table, name));
      for (let k = 0; k < 3; k++) {
        const r = Math.hypot(x[k], y[k]);
        const d = r * r + z[k] * z[k] + 4;
        // B_r = -∂A/∂z, B_z = (1/r) ∂(rA)/∂r for A = q r z d^-1.5, d = r² + z² + a².
        const br = (-20 * r * (d - 3 * z[k] * z[k])) / d ** 2.5;
        const bz = (20 * z[k] * (2 * d - 3 * r * r)) / d ** 2.5;
        const [ex, ey] = r > 0 ? [(br * x[k]) / r, (br * y[k]) / r] : [0, 0];
        const size = Math.hypot(ex, ey, bz);
        expect(Math.hypot(Bx[k] - ex, By[k] - ey, Bz[k] - bz) / size).toBeLessThan(1e-12);
        expect(Math.abs(divB[k]) / size).toBeLessThan(1e-12);
        const [density, electrons] = [0.03 * Math.exp(-r / 10 - Math.abs(z[k])), 1e-5 * Math.exp(-r / 6 - Math.abs(z[k]) / 1.2)];
        expect(Math.abs(ne[k] / density - 1)).toBeLessThan(1e-12);
        expect(Math.abs(C[k] / electrons - 1)).toBeLessThan(1e-12);
      }
    });
  });

  it('writes units that astropy reads', (context) => {
    needPython(context, 'astropy');
    inFolder((folder) => {
      writeFileSync(join(folder, 's.yaml'), smallScene);
      writeFileSync(join(folder, 'p.csv'), 'x,y,z\n3,1,0.5\n');
      gyrelight(['probe', 's.yaml', '--points', 'p.csv', '--table', 'v.csv'], folder);
      const units = pythonJson(
        "import sys, json\nfrom astropy.table import Table\nt = Table.read(sys.argv[1], format='ascii.ecsv')\nprint(json.dumps([str(t[c].unit) for c in ('x', 'Bx', 'ne', 'divB')]))",
        [join(folder, 'v.csv')],
      );
      expect(units).toEqual(['kpc', 'uG', '1 / cm3', 'uG / kpc']);
    });
  });

  it('measures and shows the divergence of a field that is given directly', () => {
    inFolder((folder) => {
      writeFileSync(join(folder, 's.yaml'), formulaScene.replace(/potential: \{phi: ".*"\}/, 'field: {r: "q*r/(r^2+z^2+a^2)^1.5"}'));
      const { stdout, status } = gyrelight(['check', 's.yaml'], folder);
      expect(status).toBe(0);
      expect(stdout).toMatch(/mine: largest \|div B\|\/\|grad B\| \d.* at x, y, z = .*WARNING: not divergence-free/);
    });
  });
});
