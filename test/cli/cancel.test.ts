import { spawn } from 'node:child_process';
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { expect, it } from 'vitest';
import { namesIn, repository, smallScene } from './run.ts';

it('Ctrl-C ends a long run soon, with words and nothing half-written', async () => {
  const folder = mkdtempSync(join(tmpdir(), 'gyrelight-cancel-'));
  try {
    writeFileSync(join(folder, 's.yaml'), smallScene.replace('pixels: [22, 21]', 'pixels: 900').replace('24 arcsec', '0.6 arcsec').replace(/ {2}beam: .*\n {2}noise: .*\n/, ''));
    const run = spawn(process.execPath, [repository('dist/gyrelight.js'), 'map', 's.yaml', '--out', 'o'], { cwd: folder });
    let said = '';
    run.stderr.on('data', (chunk: Buffer) => (said += chunk.toString()));
    const ended = new Promise<number | null>((resolve) => run.once('exit', resolve));
    // A run that computes has begun: threads are up after a while.
    await new Promise((resolve) => setTimeout(resolve, 4000));
    expect(run.exitCode, said).toBe(null);
    run.kill('SIGINT');
    expect(await ended).toBe(130);
    expect(said).toMatch(/stopped; nothing half-written was left/);
    expect(namesIn(folder)).toEqual(['s.yaml']);
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
});
