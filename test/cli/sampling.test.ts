import { spawn } from 'node:child_process';
import { existsSync, mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { parquetReadObjects } from 'hyparquet';
import { expect, it } from 'vitest';
import { csvNumbers, parseCsv } from '../../src/files/csv-parse.ts';
import { inFolder } from '../support/tools.ts';
import { gyrelight, namesIn, repository, smallScene } from './run.ts';

const scene = smallScene
  .replace('pixels: [22, 21], pixel: 24 arcsec', 'pixels: 9, pixel: 60 arcsec')
  .replace('{name: low, from: 1.3 GHz, to: 1.5 GHz, channels: 4}', '{name: low, at: [1.4 GHz]}')
  .replace('{name: high, at: [4.8 GHz, 5.2 GHz, 6.1 GHz]}', '{name: high, at: [4.8 GHz]}')
  .replace('major: 72 arcsec, minor: 60 arcsec', 'major: 120 arcsec, minor: 120 arcsec');

const study = `gyrelight-study: 1
title: Small
data:
${['low', 'high'].flatMap((band) => ['Q', 'U'].map((quantity) => `  - {quantity: ${quantity}, file: sky/${quantity}-${band}.fits, noise: 20 uJy/beam}`)).join('\n')}
hypotheses:
  - {name: halo, scene: a.scene.yaml, free: {field.disc.strength: [2 uG, 12 uG], field.halo.strength: [-5 uG, 5 uG]}}
  - {name: weaker halo, scene: a.scene.yaml, free: {field.disc.strength: [2 uG, 12 uG]}, tied: {field.halo.strength: {formula: "0*s", where: {s: field.disc.strength}}}}
method: nested
foreground: fixed
`;

function prepare(folder: string): void {
  writeFileSync(join(folder, 'a.scene.yaml'), scene);
  writeFileSync(join(folder, 'a.study.yaml'), study);
  expect(gyrelight(['map', 'a.scene.yaml', '--out', 'sky', '--quiet', '--workers', '1'], folder).status).toBe(0);
}

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
