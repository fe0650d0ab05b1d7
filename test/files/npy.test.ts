import { readFileSync, writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { expect, test } from 'vitest';
import { gridSource } from '../../src/files/grid-source.ts';
import { filesBeside } from '../../src/files/node-io.ts';
import { isNpy, readNpy, writeNpy } from '../../src/files/npy.ts';
import { inFolder, needPython, pythonJson, runPython } from '../support/tools.ts';

const ramp = (count: number): number[] => Array.from({ length: count }, (_, k) => k + 0.25);

test('what numpy writes is read: types, orders, ranks and format versions', (context) => {
  needPython(context, 'numpy');
  inFolder((folder) => {
    const code = `
import numpy as np, sys
from numpy.lib import format
folder = sys.argv[1]
a = np.arange(24).reshape(2, 3, 4) + 0.25
np.save(folder + '/c64.npy', a)
np.save(folder + '/c32.npy', a.astype('<f4'))
np.save(folder + '/f64.npy', np.asfortranarray(a))
np.save(folder + '/f32.npy', np.asfortranarray(a.astype('<f4')))
np.save(folder + '/line.npy', a.ravel())
for version in ((2, 0), (3, 0)):
    with open(folder + f'/v{version[0]}.npy', 'wb') as out:
        format.write_array(out, a, version=version)
`;
    runPython(code, [folder]);
    for (const name of ['c64', 'c32', 'f64', 'f32', 'v2', 'v3']) {
      const { shape, values } = readNpy(readFileSync(join(folder, `${name}.npy`)), name);
      expect(shape).toEqual([2, 3, 4]);
      expect(values instanceof Float32Array).toBe(name.endsWith('32'));
      expect([...values]).toEqual(ramp(24));
    }
    expect(readNpy(readFileSync(join(folder, 'line.npy')), 'line').shape).toEqual([24]);
  });
});

test('what is written is read by numpy and by ourselves', (context) => {
  needPython(context, 'numpy');
  inFolder((folder) => {
    for (const shape of [[24], [4, 6], [2, 3, 4], [2, 3, 2, 2]]) {
      for (const values of [Float32Array.from(ramp(24)), Float64Array.from(ramp(24))]) {
        const bytes = writeNpy(values, shape);
        expect(isNpy(bytes)).toBe(true);
        expect(readNpy(bytes, 'own')).toMatchObject({ shape, values });
        const path = join(folder, 'own.npy');
        writeFileSync(path, bytes);
        const seen = pythonJson(`import numpy as np, json, sys; a = np.load(sys.argv[1]); print(json.dumps([list(a.shape), str(a.dtype), a.ravel().tolist(), ${bytes.length} % 64 >= 0]))`, [path]);
        expect(seen).toEqual([shape, values instanceof Float32Array ? 'float32' : 'float64', ramp(24), true]);
      }
    }
  });
});

test('the header fills blocks of 64 bytes, as the format wants', () => {
  for (const shape of [[1], [100000, 1, 1, 1], [2, 3, 4]]) {
    const bytes = writeNpy(new Float32Array(shape.reduce((a, b) => a * b)), shape);
    const length = new DataView(bytes.buffer).getUint16(8, true);
    expect((10 + length) % 64).toBe(0);
    expect(bytes[9 + length]).toBe(10);
  }
});

const whole = writeNpy(Float64Array.from(ramp(24)), [2, 3, 4]);
function changed(from: string, to: string): Uint8Array {
  const text = Array.from(whole, (byte) => String.fromCharCode(byte)).join('');
  return Uint8Array.from(text.replace(from, to), (letter) => letter.charCodeAt(0));
}

test.each([
  ['big-endian', changed('<f8', '>f8'), /type >f8; allowed: <f4, <f8/],
  ['whole numbers', changed('<f8', '<i8'), /type <i8/],
  ['cut', whole.subarray(0, whole.length - 8), /needs 192 bytes of numbers, but the file holds 184: is it cut\?/],
  ['too long', changed('(2, 3, 4)', '(2, 3, 3)'), /needs 144 bytes of numbers, but the file holds 192$/],
  ['no shape', changed("'shape'", "'shade'"), /has no shape that is understood/],
  ['no array', Uint8Array.of(1, 2, 3), /not a NumPy array file/],
  ['a future version', Uint8Array.from(whole, (byte, k) => (k === 6 ? 9 : byte)), /version is 9\.0; allowed: 1\.0, 2\.0, 3\.0/],
  ['cut header', whole.subarray(0, 40), /ends within its header/],
])('%s is refused in words', (_, bytes, message) => {
  expect(() => readNpy(bytes, 'bad.npy')).toThrow(message);
});

test('a cube of astropy has the indices that astropy shows, and its SHA-256 is that of Python', (context) => {
  needPython(context, 'astropy', 'numpy');
  inFolder((folder) => {
    const code = `
import numpy as np, sys, json, hashlib
from astropy.io import fits
path = sys.argv[1] + '/cube.fits'
hdu = fits.PrimaryHDU((np.arange(24).reshape(2, 3, 4) + 0.25).astype('f4'))
hdu.header['BUNIT'] = 'uG'
hdu.writeto(path)
print(json.dumps(hashlib.sha256(open(path, 'rb').read()).hexdigest()))
`;
    const sum = pythonJson(code, [folder]);
    const { arrays, sha256 } = gridSource(filesBeside(join(folder, 'a.scene.yaml')))('cube.fits');
    expect(sha256).toBe(sum);
    expect(arrays).toHaveLength(1);
    expect(arrays[0].shape).toEqual([2, 3, 4]);
    expect([...arrays[0].values]).toEqual(ramp(24));
    expect(arrays[0].keywords.get('BUNIT')).toBe('uG');
  });
});

test('other files are refused by name', () => {
  const source = gridSource({ bytes: () => new TextEncoder().encode('x,y\n1,2\n') });
  expect(() => source('table.csv')).toThrow('neither a FITS file nor a NumPy array file');
});
