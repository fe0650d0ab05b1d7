import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { expect, test } from 'vitest';
import { addMapFiles } from '../../src/cli/map-files.ts';
import { OutputFolder } from '../../src/cli/output-folder.ts';
import { localBackend } from '../../src/ray/job.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { lookAt } from '../../src/sky/observe.ts';
import { InputError } from '../../src/units/input-error.ts';
import { namesIn, smallScene } from './run.ts';

const sceneText = smallScene.replace('[22, 21]', '5').replace(/ {2}beam: .*\n {2}noise: .*\n/, '');
const scene = parseScene(sceneText, 's.yaml');
const provenance = { sceneText, version: '0', seed: 7 };

async function inFolderUntil(work: (folder: string) => Promise<void>): Promise<void> {
  const folder = mkdtempSync(join(tmpdir(), 'gyrelight-'));
  try {
    await work(folder);
  } finally {
    rmSync(folder, { recursive: true, force: true });
  }
}

test('cubes stopped while they are written leave nothing, folders made for them included', async () => {
  const sky = await lookAt(scene, localBackend());
  await inFolderUntil(async (folder) => {
    const output = new OutputFolder(join(folder, 'new', 'maps'));
    const controller = new AbortController();
    let underWay: readonly string[] = [];
    const stop = (): void => {
      underWay = namesIn(output.path);
      controller.abort(new Error('stopped here'));
    };
    await expect(addMapFiles(output, scene, sky, provenance, { signal: controller.signal, onProgress: stop })).rejects.toThrow('stopped here');
    expect(underWay.length).toBe(3);
    expect(underWay.every((name) => name.endsWith('.part'))).toBe(true);
    output.abandon();
    output.abandon();
    expect(namesIn(folder)).toEqual([]);
  });
});

test('a place that cannot be written is said before any cube is, and nothing is left beside it', async () => {
  const sky = await lookAt(scene, localBackend());
  await inFolderUntil(async (folder) => {
    mkdirSync(join(folder, 'U-low.fits'));
    const output = new OutputFolder(folder);
    await expect(addMapFiles(output, scene, sky, provenance, {})).rejects.toThrow(/U-low\.fits: cannot write the file: a folder has that name/);
    output.abandon();
    expect(namesIn(folder)).toEqual(['U-low.fits']);
  });
});

test('where one file cannot be put in its place, those not yet there go too', async () => {
  const sky = await lookAt(scene, localBackend());
  await inFolderUntil(async (folder) => {
    const output = new OutputFolder(folder);
    await addMapFiles(output, scene, sky, provenance, {});
    mkdirSync(join(folder, 'Q-low.fits'));
    writeFileSync(join(folder, 'Q-low.fits', 'mine'), '');
    expect(() => output.write()).toThrow(InputError);
    // The first was whole already; no part of another is left.
    expect(namesIn(folder)).toEqual(['I-low.fits', 'Q-low.fits']);
  });
});
