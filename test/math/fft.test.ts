import { expect, test } from 'vitest';
import { goodSize, frequencyOf, transformImage, zeroImage } from '../../src/math/fft.ts';
import { randomStream } from '../../src/math/random.ts';
import { needPython, pythonJson } from '../support/tools.ts';
import { largestDifference } from '../sky/compare.ts';

test('good sizes are powers of two, at least 2', () => {
  expect([0, 1, 2, 3, 129, 256, 257].map(goodSize)).toEqual([2, 2, 2, 4, 256, 256, 512]);
});

test('the transform of an oblong complex image is that of numpy', (context) => {
  needPython(context, 'numpy');
  const image = zeroImage(16, 7);
  expect([image.width, image.height]).toEqual([16, 8]);
  const stream = randomStream(3, 'fft');
  image.real.forEach((_, k) => (image.real[k] = stream.gaussian()));
  image.imaginary.forEach((_, k) => (image.imaginary[k] = stream.gaussian()));
  const [before, beforeImaginary] = [image.real.slice(), image.imaginary.slice()];
  const expected = pythonJson(
    `import sys, json, numpy as np
re, im = (np.array(a).reshape(8, 16) for a in json.load(sys.stdin))
f = np.fft.fft2(re + 1j * im)
print(json.dumps([f.real.ravel().tolist(), f.imag.ravel().tolist(), np.fft.fftfreq(16).tolist()]))`,
    [],
    JSON.stringify([[...before], [...beforeImaginary]]),
  ) as [number[], number[], number[]];
  transformImage(image, 'forward');
  // Values of order 10; rounding of 128 terms.
  expect(largestDifference(image.real, expected[0])).toBeLessThan(1e-13);
  expect(largestDifference(image.imaginary, expected[1])).toBeLessThan(1e-13);
  expect(Array.from({ length: 16 }, (_, k) => frequencyOf(k, 16))).toEqual(expected[2]);
  transformImage(image, 'inverse');
  expect(largestDifference(image.real, before)).toBeLessThan(1e-14);
  expect(largestDifference(image.imaginary, beforeImaginary)).toBeLessThan(1e-14);
});

test('a size that has no transform is refused', () => {
  const plane = new Float64Array(24);
  expect(() => transformImage({ width: 6, height: 4, real: plane, imaginary: plane }, 'forward')).toThrow(/6 x 4/);
});
