import { spawn } from 'node:child_process';
import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { parquetReadObjects } from 'hyparquet';
import { expect, it } from 'vitest';
import { csvNumbers, parseCsv } from '../../src/files/csv-parse.ts';
import { inFolder } from '../support/tools.ts';
import { gyrelight, namesIn, repository } from './run.ts';
import { prepareStudy as prepare, study } from './small-study.ts';

const flags = ['--live', '40', '--starts', '0', '--workers', '1', '--quiet'];

it('rank with nested sampling: Δ ln Z, a sentence per pair, posterior tables and figures', async () => {
  await inFolderAsync(async (folder) => {
    prepare(folder);
    const { status, stdout, stderr } = gyrelight(['rank', 'a.study.yaml', '--out', 'r', '--json', ...flags], folder);
    expect(stderr).toBe('');
    expect(status).toBe(0);
    const result = JSON.parse(stdout) as { verdict: string; pairs: { preferred: string; deltaLogEvidence: number; sentence: string }[]; hypotheses: { name: string; logEvidence: number }[] };
    // The scene that the data were made from wins: its halo of 2 uG is far above the noise.
    expect(result.hypotheses[0].name).toBe('halo');
    expect(result.pairs).toHaveLength(1);
    expect(result.pairs[0].deltaLogEvidence).toBeGreaterThan(5);
    expect(result.verdict).toMatch(/prefer "halo" over "weaker halo": very strong evidence/);
    expect(namesIn(join(folder, 'r/halo'))).toEqual(expect.arrayContaining(['pairwise.svg', 'posterior.csv', 'posterior.parquet', 'profile-P-1.4GHz.svg']));
    expect(readFileSync(join(folder, 'r/report.html'), 'utf8')).toContain('Δ ln Z');
    // The same table in both forms.
    const csv = parseCsv(readFileSync(join(folder, 'r/halo/posterior.csv'), 'utf8'), 'posterior.csv');
    const bytes = readFileSync(join(folder, 'r/halo/posterior.parquet'));
    const rows = await parquetReadObjects({ file: bytes.buffer.slice(bytes.byteOffset, bytes.byteOffset + bytes.length) as ArrayBuffer });
    for (const name of ['field.disc.strength', 'field.halo.strength', 'lnLikelihood', 'weight']) {
      expect(rows.map((row) => row[name] as number)).toEqual([...csvNumbers(csv, name)]);
    }
  });
});

it('fit, killed with -9 and resumed, gives the same posterior bit for bit', async () => {
  await inFolderAsync(async (folder) => {
    prepare(folder);
    const command = ['fit', 'a.study.yaml', '--hypothesis', 'halo', '--out', 'f', ...flags, '--live', '60'];
    const child = spawn(process.execPath, [repository('dist/gyrelight.js'), ...command], { cwd: folder, stdio: 'ignore' });
    const ended = new Promise((resolve) => child.on('exit', resolve));
    // As soon as a checkpoint of the sampler is there.
    while (child.exitCode === null && !namesIn(join(folder, 'f/unfinished')).some((name) => name.endsWith('.sampling.json'))) await new Promise((resolve) => setTimeout(resolve, 20));
    child.kill('SIGKILL');
    await ended;
    expect(existsSync(join(folder, 'f/fit.json'))).toBe(false);
    expect(gyrelight([...command, '--resume'], folder).status).toBe(0);
    const whole = gyrelight([...command.map((word) => (word === 'f' ? 'g' : word))], folder);
    expect(whole.status).toBe(0);
    const table = (out: string): string => readFileSync(join(folder, out, 'posterior/posterior.csv'), 'utf8');
    expect(table('f')).toBe(table('g'));
    expect(namesIn(join(folder, 'f/unfinished'))).toEqual([]);
  });
});

it('several runs make one posterior: a smaller error, the same ln Z, gone on with run by run', () => {
  inFolder((folder) => {
    prepare(folder);
    const fit = (out: string, ...more: readonly string[]): { logEvidence: number; logEvidenceError: number } => {
      const { status, stdout, stderr } = gyrelight(['fit', 'a.study.yaml', '--hypothesis', 'halo', '--out', out, '--json', ...flags, ...more], folder);
      expect(status, stderr).toBe(0);
      return JSON.parse(stdout) as { logEvidence: number; logEvidenceError: number };
    };
    const [one, three] = [fit('one'), fit('three', '--runs', '3')];
    // Runs are independent: the error falls as their root, 0.58, itself known to some 10 %.
    expect(three.logEvidenceError / one.logEvidenceError).toBeGreaterThan(0.4);
    expect(three.logEvidenceError / one.logEvidenceError).toBeLessThan(0.75);
    expect(Math.abs(three.logEvidence - one.logEvidence)).toBeLessThan(4 * Math.hypot(one.logEvidenceError, three.logEvidenceError));
    expect(gyrelight(['fit', 'a.study.yaml', '--hypothesis', 'halo', '--method', 'walkers', '--runs', '3', ...flags], folder).stderr).toMatch(/--runs 3: means nothing for walkers/);
  });
});

it('forecast weighs candidate bands: a figure, a table, a sentence', () => {
  inFolder((folder) => {
    prepare(folder);
    writeFileSync(join(folder, 'b.study.yaml'), `${study}forecast: {bands: [{name: S, at: [2.2 GHz], noise: 20 uJy/beam, beam: {major: 120 arcsec, minor: 120 arcsec, angle: 0 deg}}, {name: weak, at: [2.2 GHz], noise: 20 Jy/beam, beam: {major: 120 arcsec, minor: 120 arcsec, angle: 0 deg}}]}\n`);
    const { status, stdout } = gyrelight(['forecast', 'b.study.yaml', '--out', 'w', '--json', ...flags], folder);
    expect(status).toBe(0);
    const { verdict, bands } = JSON.parse(stdout) as { verdict: string; bands: { band: string | null; outlooks: { deltaLogEvidence: number }[] }[] };
    expect(verdict).toMatch(/^S would tell "halo" from "weaker halo" best/);
    const worth = bands.map(({ outlooks }) => outlooks[0].deltaLogEvidence);
    // A band with hopeless noise adds nothing to none; a good one does.
    expect(bands.map(({ band }) => band)).toEqual([null, 'S', 'weak']);
    expect(Math.abs(worth[2] / worth[0] - 1)).toBeLessThan(1e-3);
    expect(worth[1]).toBeGreaterThan(1.2 * worth[0]);
    expect(namesIn(join(folder, 'w'))).toEqual(['forecast.csv', 'forecast.json', 'forecast.svg']);
    expect(gyrelight(['forecast', 'a.study.yaml', ...flags], folder).stderr).toMatch(/no `forecast: \{bands/);
  });
});

async function inFolderAsync(work: (folder: string) => Promise<void>): Promise<void> {
  const folder = mkdtempSync(join(tmpdir(), 'gyrelight-'));
  try {
    await work(folder);
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

it.each([
  [['fit', 'scenes/lantern-wheel/lantern-wheel.study.yaml'], /--hypothesis: the study has \d+ hypotheses; name one: disc alone/],
  [['fit', 'scenes/lantern-wheel/lantern-wheel.study.yaml', '--hypothesis', 'disc alon'], /did you mean "disc alone"/],
  [['rank', 'scenes/lantern-wheel/lantern-wheel.study.yaml', '--live', '3'], /--live 3: expected a whole number from 20/],
])('%s is refused in words', (parameters, message) => {
  const { status, stderr } = gyrelight(parameters);
  expect(status).toBe(2);
  expect(stderr).toMatch(message);
});
