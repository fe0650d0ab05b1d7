import FFT from 'fft.js';

/**
 * A complex image for 2-D Fourier transforms: two planes [row * width + column], both sides powers
 * of two. Two real images may share one transform, one in each plane.
 */
export interface ComplexImage {
  readonly width: number;
  readonly height: number;
  readonly real: Float64Array;
  readonly imaginary: Float64Array;
}

/** The smallest size that can be transformed and holds `count` samples: a power of two, at least 2. */
export function goodSize(count: number): number {
  let size = 2;
  while (size < count) size *= 2;
  return size;
}

/** A complex image of zeros that holds at least width x height samples. */
export function zeroImage(width: number, height: number): ComplexImage {
  const [goodWidth, goodHeight] = [goodSize(width), goodSize(height)];
  return {
    width: goodWidth,
    height: goodHeight,
    real: new Float64Array(goodWidth * goodHeight),
    imaginary: new Float64Array(goodWidth * goodHeight),
  };
}

/** Frequency of index `index` of a transform of `size` samples, cycles per sample, in [-1/2, 1/2). */
export function frequencyOf(index: number, size: number): number {
  return (index < size / 2 ? index : index - size) / size;
}

/**
 * The discrete Fourier transform in place, sum f e^{-2 pi i (k x + l y)}, or its inverse, which
 * carries the factor 1/(width height). Throws RangeError where a side is not a power of two.
 */
export function transformImage(image: ComplexImage, direction: 'forward' | 'inverse'): void {
  const { width, height } = image;
  if (goodSize(width) !== width || goodSize(height) !== height) {
    throw new RangeError(`${width} x ${height} is no size for a Fourier transform; pad it with goodSize`);
  }
  const alongRow = lineTransform(width, direction);
  for (let row = 0; row < height; row++) alongRow(image, row * width, 1);
  const alongColumn = lineTransform(height, direction);
  for (let column = 0; column < width; column++) alongColumn(image, column, width);
}

type LineTransform = (image: ComplexImage, start: number, stride: number) => void;

function lineTransform(size: number, direction: 'forward' | 'inverse'): LineTransform {
  const transform = new FFT(size);
  const input = new Float64Array(2 * size);
  const output = new Float64Array(2 * size);
  return ({ real, imaginary }, start, stride) => {
    for (let k = 0, at = start; k < size; k++, at += stride) {
      input[2 * k] = real[at];
      input[2 * k + 1] = imaginary[at];
    }
    if (direction === 'forward') transform.transform(output, input);
    else transform.inverseTransform(output, input);
    for (let k = 0, at = start; k < size; k++, at += stride) {
      real[at] = output[2 * k];
      imaginary[at] = output[2 * k + 1];
    }
  };
}

/** Multiplies a transformed image by a real even filter [row * width + column], in place. */
export function multiplyImage(image: ComplexImage, filter: Float64Array): void {
  for (let k = 0; k < filter.length; k++) {
    image.real[k] *= filter[k];
    image.imaginary[k] *= filter[k];
  }
}
