import FFT from 'fft.js';

/**
 * A complex function on a cube of side points, a power of two: two planes [x][y][z], the last index
 * running fastest. Two real functions may share one, one in each plane.
 */
export interface ComplexCube {
  readonly side: number;
  readonly real: Float32Array;
  readonly imaginary: Float32Array;
}

/** A cube of zeros. */
export function zeroCube(side: number): ComplexCube {
  return { side, real: new Float32Array(side ** 3), imaginary: new Float32Array(side ** 3) };
}

/** Lines transformed side by side, so that memory is read in runs also across the fastest index. */
const linesTogether = 16;

/**
 * The sum Σ c e^{2 pi i (k x + l y + m z)/side} over all (k, l, m), in place, without a factor.
 * Lines are transformed in 64 bits and kept in 32. Lines of zeros cost next to nothing. Throws
 * RangeError where the side is no power of two.
 */
export function synthesizeCube({ side, real, imaginary }: ComplexCube): void {
  if (side < 2 || (side & (side - 1)) !== 0) throw new RangeError(`${side} is no power of two`);
  const transform = new FFT(side);
  const lines = Array.from({ length: linesTogether }, () => new Float64Array(2 * side));
  const output = new Float64Array(2 * side);
  /** Transforms `count` lines that begin at start, start + 1, … */
  const along = (start: number, stride: number, count: number): void => {
    let isEmpty = true;
    for (let k = 0, at = start; k < side; k++, at += stride) {
      for (let line = 0; line < count; line++) {
        const [a, b] = [real[at + line], imaginary[at + line]];
        lines[line][2 * k] = a;
        lines[line][2 * k + 1] = b;
        if (a !== 0 || b !== 0) isEmpty = false;
      }
    }
    if (isEmpty) return;
    for (let line = 0; line < count; line++) {
      transform.inverseTransform(output, lines[line]);
      lines[line].set(output);
    }
    for (let k = 0, at = start; k < side; k++, at += stride) {
      for (let line = 0; line < count; line++) {
        real[at + line] = side * lines[line][2 * k];
        imaginary[at + line] = side * lines[line][2 * k + 1];
      }
    }
  };
  const run = Math.min(linesTogether, side);
  for (let start = 0; start < side ** 3; start += side) along(start, 1, 1);
  for (let x = 0; x < side; x++) for (let z = 0; z < side; z += run) along(x * side * side + z, side, run);
  for (let start = 0; start < side * side; start += run) along(start, side * side, run);
}
