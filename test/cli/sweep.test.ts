import { spawnSync } from 'node:child_process';
import { appendFileSync, existsSync, mkdirSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { parquetReadObjects } from 'hyparquet';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { csvNumbers, parseCsv } from '../../src/files/csv-parse.ts';
import { needPython, pythonJson } from '../support/tools.ts';
import { gyrelight, namesIn, repository, type Outcome } from './run.ts';
import { killAndResume, quickScene, quickSweep, tablesOf } from './sweep-kill.ts';

describe('gyrelight sweep', () => {
  const folder = mkdtempSync(join(tmpdir(), 'gyrelight-sweep-'));
  const sweep = (...more: readonly string[]): Outcome => gyrelight(['sweep', 'q.sweep.yaml', '--quiet', ...more], folder);
  const numbers = (out: string, name: string): Float64Array => csvNumbers(parseCsv(readFileSync(join(folder, out, 'sweep.csv'), 'utf8'), 'sweep.csv'), name);

  beforeAll(() => {
    writeFileSync(join(folder, 'small.scene.yaml'), quickScene);
    writeFileSync(join(folder, 'q.sweep.yaml'), quickSweep);
    const { status, stderr } = sweep('--out', 'one', '--workers', '1');
    expect(stderr).toBe('');
    expect(status).toBe(0);
  });
  afterAll(() => rmSync(folder, { recursive: true, force: true }));

  it('makes the same tables for any number of workers', () => {
    expect(sweep('--out', 'three', '--workers', '3').status).toBe(0);
    tablesOf(folder, 'three').forEach((table, k) => expect(table.equals(tablesOf(folder, 'one')[k])).toBe(true));
    expect(namesIn(join(folder, 'one'))).toEqual(['curves-field-halo-core.svg', 'curves-galaxy-inclination.svg', 'heat-map.svg', 'importance.svg', 'report.html', 'store', 'summary.json', 'sweep.csv', 'sweep.parquet']);
  });

  it('a row is what `map` and `measure` say of the same scene and seed', () => {
    // Row 61: point 30, realisation 1; noise of seed 8. Both go through files of 64 bits.
    const row = 61;
    const inclination = numbers('one', 'galaxy.inclination')[row];
    const core = numbers('one', 'field.halo.core')[row];
    expect(numbers('one', 'seed')[row]).toBe(8);
    const set = ['--set', `galaxy.inclination=${inclination} deg`, '--set', `field.halo.core=${core} kpc`, '--set', 'numerics.bits=64'];
    expect(gyrelight(['map', 'small.scene.yaml', '--out', 'map', '--seed', '8', '--quiet', ...set], folder).status).toBe(0);
    const orientation = ['--inclination', `${inclination} deg`, '--position-angle', '25 deg', '--distance', '10 Mpc'];
    const measured = gyrelight(['measure', 'map/I-low.fits', 'map/Q-low.fits', 'map/U-low.fits', ...orientation, '--radii', '3 kpc,6 kpc', '--sectors', '12', '--noise', '20 uJy/beam', '--out', 'measured', '--quiet', '--json'], folder);
    expect(measured.stderr).toBe('');
    const { rings: [{ approachingReceding }] } = JSON.parse(measured.stdout) as { rings: { approachingReceding: { value: number } }[] };
    // The maps' inclination and angles pass through decimal text: 12 digits.
    expect(Math.abs(numbers('one', 'asymmetry_low')[row] / approachingReceding.value - 1)).toBeLessThan(1e-6);
  });

  it('is read by astropy with its units, and its Parquet holds the same numbers', async (context) => {
    needPython(context, 'astropy');
    const seen = pythonJson(
      `import sys, json\nfrom astropy.table import Table\nt = Table.read(sys.argv[1], format='ascii.ecsv')\nprint(json.dumps([len(t), str(t['galaxy.inclination'].unit), str(t['origin_height_low'].unit), t['point'].dtype.kind, float(t['asymmetry_high'][7])]))`,
      [join(folder, 'one/sweep.csv')],
    ) as unknown[];
    expect(seen).toEqual([96, 'deg', 'kpc', 'i', numbers('one', 'asymmetry_high')[7]]);
    const [, parquet] = tablesOf(folder, 'one');
    const rows = await parquetReadObjects({ file: parquet.buffer.slice(parquet.byteOffset, parquet.byteOffset + parquet.length) as ArrayBuffer });
    expect(rows.map((row) => row.asymmetry_high)).toEqual([...numbers('one', 'asymmetry_high')]);
  });

  it('killed at random moments it loses, doubles and changes no row', async () => {
    const hits = await killAndResume(folder, 'killed', 4, 1);
    expect(hits).toBeGreaterThan(1);
    tablesOf(folder, 'killed').forEach((table, k) => expect(table.equals(tablesOf(folder, 'one')[k])).toBe(true));
  });

  it('drops a torn line and says so, and computes only what is missing', () => {
    mkdirSync(join(folder, 'torn'));
    spawnSync('cp', ['-r', join(folder, 'one/store'), join(folder, 'torn/store')]);
    const store = join(folder, 'torn/store');
    const [name] = readdirSync(store).filter((one) => one.endsWith('.journal'));
    const text = readFileSync(join(store, name), 'latin1');
    writeFileSync(join(store, name), text.slice(0, text.length - 100), 'latin1');
    appendFileSync(join(store, 'rows-2-9.journal'), '12345678 3 0.25 1');
    const { stdout, stderr, status } = gyrelight(['sweep', 'q.sweep.yaml', '--out', 'torn', '--resume', '--json'], folder);
    expect(status, stderr).toBe(0);
    expect(stderr).toContain('2 torn lines dropped');
    expect((JSON.parse(stdout) as { computed: number }).computed).toBe(1);
    tablesOf(folder, 'torn').forEach((table, k) => expect(table.equals(tablesOf(folder, 'one')[k])).toBe(true));
  });

  it('refuses rows that are there, and rows of a changed sweep, by what has changed', () => {
    const before = tablesOf(folder, 'one');
    const again = sweep('--out', 'one');
    expect(again.status).toBe(2);
    expect(again.stderr).toMatch(/--out one: rows of a sweep are there already: --resume goes on/);
    const other = sweep('--out', 'one', '--resume', '--set', 'field.halo.strength=3 uG');
    expect(other.status).toBe(2);
    expect(other.stderr).toMatch(/--resume: the rows in one\/store are those of another sweep.*changed since: scene 1, small.scene.yaml/);
    writeFileSync(join(folder, 'r.sweep.yaml'), quickSweep.replace('realisations: 2', 'realisations: 3').replace('4 kpc', '5 kpc'));
    const changed = gyrelight(['sweep', 'r.sweep.yaml', '--out', 'one', '--resume', '--quiet'], folder);
    expect(changed.stderr).toMatch(/changed since: realisations; vary.field.halo.core\. Undo the change/);
    tablesOf(folder, 'one').forEach((table, k) => expect(table.equals(before[k])).toBe(true));
  });

  it('a full disk ends it with words, and what it has stays good', () => {
    // A limit on the size of files stands for the disk: writes fail in the same place.
    const limited = spawnSync('sh', ['-c', `trap '' XFSZ; ulimit -f 24; exec "$0" "$@"`, process.execPath, repository('dist/gyrelight.js'), 'sweep', 'q.sweep.yaml', '--out', 'full', '--workers', '1', '--quiet'], { cwd: folder, encoding: 'utf8' });
    expect(limited.status).toBe(1);
    expect(limited.stderr).toMatch(/rows-1-1\.journal: the file would be larger than is allowed here/);
    expect(limited.stderr).not.toContain('    at ');
    expect(existsSync(join(folder, 'full/sweep.csv'))).toBe(false);
    expect(sweep('--out', 'full', '--resume').status).toBe(0);
    tablesOf(folder, 'full').forEach((table, k) => expect(table.equals(tablesOf(folder, 'one')[k])).toBe(true));
  });

  it('a disk that is really full, too', (context) => {
    const disk = join(folder, 'disk');
    mkdirSync(disk);
    if (spawnSync('mount', ['-t', 'tmpfs', '-o', 'size=24k', 'tmpfs', disk]).status !== 0) context.skip('needs the right to mount a small disk: run as root');
    try {
      const { status, stderr } = sweep('--out', 'disk/out', '--workers', '2');
      expect(status).toBe(1);
      expect(stderr).toMatch(/no space is left on the disk/);
      expect(spawnSync('mount', ['-o', 'remount,size=4m', disk]).status).toBe(0);
      expect(sweep('--out', 'disk/out', '--resume').status).toBe(0);
      tablesOf(folder, 'disk/out').forEach((table, k) => expect(table.equals(tablesOf(folder, 'one')[k])).toBe(true));
    } finally {
      spawnSync('umount', [disk]);
    }
  });

  it('a place that cannot be written is refused before anything is computed', () => {
    writeFileSync(join(folder, 'file'), 'x');
    const { status, stderr } = sweep('--out', 'file/out');
    expect(status).toBe(2);
    expect(stderr).toMatch(/a part of its path is a file, not a folder/);
  });

  it('says what it would do, and refuses flags of a cluster without one', () => {
    const { stdout, status } = gyrelight(['sweep', 'q.sweep.yaml', '--out', 'nothing', '--dry-run'], folder);
    expect(status).toBe(0);
    expect(stdout).toMatch(/Quick: grid of 48 scenes, 2 realisations each: 96 rows/);
    const script = gyrelight(['sweep', 'q.sweep.yaml', '--out', 'nothing', '--dry-run', '--engine', 'slurm', '--tasks', '6', '--slurm', '--partition="a b" --time=1:00:00'], folder);
    expect(script.stdout).toMatch(/task '.*nothing\/cluster' "\$key"/);
    expect(script.stdout).toMatch(/--array=0-5 .*--partition=a b --time=1:00:00/);
    expect(existsSync(join(folder, 'nothing'))).toBe(false);
    expect(sweep('--tasks', '3').stderr).toMatch(/--tasks 3: means nothing without --engine slurm/);
    expect(gyrelight(['map', 'small.scene.yaml', '--engine', 'slurm'], folder).stderr).toMatch(/this command is no work for a cluster/);
  });
});
