import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { expect, test } from 'vitest';
import { streamDepthCube } from '../../src/files/depth-cube-stream.ts';
import { openCubeRows } from '../../src/files/fits-rows.ts';
import { makeScratchCube } from '../../src/files/scratch-cube.ts';
import { readFits } from '../../src/files/fits-read.ts';
import { skyImageFromFits } from '../../src/files/sky-fits-read.ts';
import { depthCubeFits, stokesFits } from '../../src/files/sky-fits-write.ts';
import { smallGrid, zeroCube } from '../sky/cubes.ts';
import { fitsVerdict, inFolder, needCommand } from '../support/tools.ts';
import { namesIn } from '../cli/run.ts';

const provenance = { sceneText: 'gyrelight: 1\n', version: '0', seed: 1 };

test('rows of a cube are those of the whole, for even channels and a table of them', () => {
  inFolder((folder) => {
    for (const frequencies of [[1e9, 1.1e9, 1.2e9], [1e9, 1.3e9, 1.4e9]]) {
      const cube = zeroCube(smallGrid(5, 4), frequencies);
      const Q = cube.Q.map((_, k) => k + 0.5);
      const path = join(folder, 'q.fits');
      writeFileSync(path, stokesFits({ ...cube, Q }, 'Q', provenance, 32));
      const whole = skyImageFromFits(readFits(readFileSync(path), path), path);
      const open = openCubeRows(path, path);
      expect(open?.facts.channels).toEqual(whole.channels);
      expect(open?.facts.wcs).toEqual(whole.wcs);
      const rows = open?.rows(1, 3);
      for (let channel = 0; channel < 3; channel++) {
        expect([...(rows?.subarray(channel * 10, channel * 10 + 10) ?? [])]).toEqual([...whole.values.subarray(channel * 20 + 5, channel * 20 + 15)]);
      }
      expect([...(open?.plane(2) ?? [])]).toEqual([...whole.values.subarray(40, 60)]);
      open?.close();
      writeFileSync(path, readFileSync(path).subarray(0, 5800));
      expect(() => openCubeRows(path, 'cut.fits')).toThrow(/cut\.fits.*is it cut/);
    }
    expect(() => openCubeRows(join(folder, 'none.fits'), 'none.fits')).toThrow(/none\.fits: there is no such file/);
  });
});

test('a cube written rows by rows is, byte for byte, the one written whole', (context) => {
  needCommand(context, 'fitsverify');
  inFolder((folder) => {
    const about = { quantity: 'Faraday spectrum', unit: 'Jy/beam', sky: smallGrid(5, 4), firstDepthRadM2: -20, depthStepRadM2: 10, depthCount: 5 };
    const values = Float64Array.from({ length: 100 }, (_, k) => Math.sin(k));
    const path = join(folder, 'out', 'cube.fits');
    const stream = streamDepthCube(path, about, provenance);
    for (const [from, to] of [[2, 4], [0, 2]]) {
      const rows = new Float64Array(5 * (to - from) * 5);
      for (let depth = 0; depth < 5; depth++) rows.set(values.subarray((depth * 4 + from) * 5, (depth * 4 + to) * 5), depth * (to - from) * 5);
      stream.write(from, to, rows);
    }
    stream.finish();
    expect(namesIn(join(folder, 'out'))).toEqual(['cube.fits']);
    const bytes = new Uint8Array(readFileSync(path));
    expect(Buffer.from(bytes).equals(Buffer.from(depthCubeFits({ ...about, values }, provenance, 32)))).toBe(true);
    expect(fitsVerdict(bytes)).toMatch(/found 0 warning.* and 0 error/);
    const other = streamDepthCube(path.replace('cube', 'other'), about, provenance);
    other.abandon();
    expect(namesIn(join(folder, 'out'))).toEqual(['cube.fits']);
    // A folder made for it goes with it.
    streamDepthCube(join(folder, 'new', 'cube.fits'), about, provenance).abandon();
    expect(namesIn(folder)).toEqual(['out']);
  });
});

test('a scratch cube gives back rows and planes in single precision, and is gone when closed', () => {
  const usual = process.env.TMPDIR;
  inFolder((folder) => {
    process.env.TMPDIR = folder;
    try {
      const cube = makeScratchCube(3, 4, 2);
      const planes = [0, 1].map((channel) => Float64Array.from({ length: 12 }, (_, k) => (k === 5 ? NaN : Math.sin(12 * channel + k))));
      // In any order.
      [1, 0].forEach((channel) => cube.write(channel, planes[channel]));
      const single = planes.map((plane) => plane.map(Math.fround));
      expect([...cube.plane(1)]).toEqual([...single[1]]);
      expect([...cube.rows(1, 3)]).toEqual([...single[0].subarray(3, 9), ...single[1].subarray(3, 9)]);
      expect(namesIn(folder).length).toBe(1);
      cube.close();
      cube.close();
      expect(namesIn(folder)).toEqual([]);
    } finally {
      if (usual === undefined) delete process.env.TMPDIR;
      else process.env.TMPDIR = usual;
    }
  });
});
