import { createWriteStream, mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { spawnSync } from 'node:child_process';
import { once } from 'node:events';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, expect, it } from 'vitest';
import { journalLine } from '../../src/files/journal.ts';
import { gyrelight, repository } from './run.ts';
import { killAndResume, quickScene, quickSweep, tablesOf } from './sweep-kill.ts';

const folder = mkdtempSync(join(tmpdir(), 'gyrelight-long-'));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

it('killed at 50 random moments, a sweep loses, doubles and changes no row', async () => {
  writeFileSync(join(folder, 'small.scene.yaml'), quickScene);
  // Many scenes, so that 50 kills hit while rows are being written.
  writeFileSync(join(folder, 'q.sweep.yaml'), quickSweep.replace('steps: 12', 'steps: 120'));
  expect(gyrelight(['sweep', 'q.sweep.yaml', '--out', 'whole', '--quiet'], folder).status).toBe(0);
  let hits = 0;
  for (let round = 0; hits < 50; round++) {
    hits += await killAndResume(folder, `killed-${round}`, 50, round);
    tablesOf(folder, `killed-${round}`).forEach((table, k) => expect(table.equals(tablesOf(folder, 'whole')[k])).toBe(true));
  }
  expect(hits).toBeGreaterThanOrEqual(50);
});

it('merges a million rows in 192 MB', async () => {
  writeFileSync(join(folder, 'small.scene.yaml'), quickScene);
  writeFileSync(join(folder, 'm.sweep.yaml'), `gyrelight-sweep: 1\nscene: small.scene.yaml\nvary:\n  galaxy.inclination: {from: 0 deg, to: 80 deg, steps: 1000}\n  field.halo.core: {from: 1 kpc, to: 4 kpc, steps: 1000}\nmeasure: [asymmetry]\n`);
  // A first run is stopped at once: it leaves the store's identity. The rows are made up.
  spawnSync(process.execPath, [repository('dist/gyrelight.js'), 'sweep', 'm.sweep.yaml', '--out', 'm', '--workers', '1', '--quiet'], { cwd: folder, timeout: 4000, killSignal: 'SIGKILL' });
  const store = join(folder, 'm/store');
  rmSync(join(store, 'rows-1-1.journal'), { force: true });
  mkdirSync(store, { recursive: true });
  const journals = [1, 2, 3].map((k) => createWriteStream(join(store, `made-${k}.journal`)));
  for (let row = 0; row < 1_000_000; row++) {
    const line = journalLine(row, Array.from({ length: 8 }, (_, k) => Math.sin(row + k)));
    const journal = journals[(row * 7) % 3];
    if (!journal.write(line)) await once(journal, 'drain');
  }
  await Promise.all(journals.map((journal) => new Promise((resolve) => journal.end(resolve))));
  const { status, stderr } = spawnSync(process.execPath, ['--max-old-space-size=192', repository('dist/gyrelight.js'), 'sweep', 'm.sweep.yaml', '--out', 'm', '--resume', '--quiet'], { cwd: folder, encoding: 'utf8' });
  expect(status, stderr).toBe(0);
});
