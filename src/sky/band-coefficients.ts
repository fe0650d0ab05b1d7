import { chebyshevTransform } from '../math/chebyshev.ts';
import { spectrumAt, type BandNodes } from './band-nodes.ts';
import type { RayCoefficients } from './band-tails.ts';

/** Pixels worked on together. */
const blockPixels = 64;

/**
 * Turns planes of values at a band's nodes, [point * pixels + pixel], in place into planes of
 * coefficients of value over spectrum, [degree * offsets + offset].
 */
export function toCoefficients(planes: Float64Array, { degrees, offsetsHz, spectrum }: BandNodes, index: number): void {
  const offsets = offsetsHz.length;
  const pixels = planes.length / (degrees * offsets);
  const matrix = chebyshevTransform(degrees);
  const factors = spectrumAt(index, spectrum);
  const values = new Float64Array(degrees * blockPixels);
  for (let offset = 0; offset < offsets; offset++) {
    for (let start = 0; start < pixels; start += blockPixels) {
      const count = Math.min(blockPixels, pixels - start);
      for (let node = 0; node < degrees; node++) {
        const [from, divisor] = [(node * offsets + offset) * pixels + start, factors[node * offsets + offset]];
        for (let k = 0; k < count; k++) values[node * blockPixels + k] = planes[from + k] / divisor;
      }
      for (let degree = 0; degree < degrees; degree++) {
        const into = (degree * offsets + offset) * pixels + start;
        planes.fill(0, into, into + count);
        for (let node = 0; node < degrees; node++) {
          const weight = matrix[degree * degrees + node];
          for (let k = 0, at = node * blockPixels; k < count; k++, at++) planes[into + k] += weight * values[at];
        }
      }
    }
  }
}

/** Planes of coefficients of a band. */
export interface BandCoefficients {
  readonly I: Float64Array;
  readonly Q: Float64Array;
  readonly U: Float64Array;
}

/** Makes a reader of one ray's coefficients; what it gives back is overwritten by the next. */
export function coefficientReader({ I, Q, U }: BandCoefficients, pixels: number): (pixel: number) => RayCoefficients {
  const terms = Q.length / pixels;
  const ray = { I: new Float64Array(terms), Q: new Float64Array(terms), U: new Float64Array(terms) };
  return (pixel) => {
    for (let term = 0, place = pixel; term < terms; term++, place += pixels) {
      ray.I[term] = I[place];
      ray.Q[term] = Q[place];
      ray.U[term] = U[place];
    }
    return ray;
  };
}
