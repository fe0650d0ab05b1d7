import FFT from 'fft.js';
import { goodSize } from '../math/fft.ts';
import { gaussLegendre } from '../math/quadrature.ts';
import { depthAt, type DepthPlan } from './depth-spectrum.ts';

/** Faraday spectra of pixels side by side: planes [depth * pixels + pixel]. */
export interface DepthSpectra {
  readonly re: Float64Array;
  readonly im: Float64Array;
}

/** From Q and U of `pixels` pixels, planes [channel * pixels + pixel], to their spectra. */
export type DepthTransform = (Q: ArrayLike<number>, U: ArrayLike<number>, pixels: number, out?: DepthSpectra) => DepthSpectra;

/** Samples over which a channel is spread, twice oversampled: error about 1e-13 of sum |w P|. */
const taps = 14;
const sharpness = 2.3 * taps;

/**
 * Makes the transform F(phi) = sum w P e^{-2 i phi (lambda^2 - lambda0^2)} of a plan (Brentjens & de
 * Bruyn 2005, eq. 25 and 36). Where a pixel lacks channels (NaN) the others carry its weight; NaN
 * where it lacks half of it or more.
 * A non-uniform fast Fourier transform with the kernel of Barnett, Magland & af Klinteberg 2019:
 * channels are spread over an even grid, transformed, and divided by the kernel's own transform.
 */
export function makeDepthTransform(plan: DepthPlan): DepthTransform {
  const { lambda2M2, factors, weights, referenceLambda2, step, count } = plan;
  const channels = lambda2M2.length;
  const size = goodSize(Math.max(2 * taps, 2 * count + 2));
  const middle = Math.floor(count / 2);
  const { first, values } = spreadChannels(lambda2M2.map((square) => 2 * step * (square - referenceLambda2)), size);
  // Each channel is turned to the middle depth, about which indices count.
  const turns = lambda2M2.map((square) => -2 * depthAt(plan, middle) * (square - referenceLambda2));
  const [turnRe, turnIm] = [turns.map((turn, k) => factors[k] * Math.cos(turn)), turns.map((turn, k) => factors[k] * Math.sin(turn))];
  const correction = kernelCorrection(count, middle, size);
  const transform = new FFT(size);
  const [grid, spectrum] = [new Float64Array(2 * size), new Float64Array(2 * size)];
  return (Q, U, pixels, out = { re: new Float64Array(count * pixels), im: new Float64Array(count * pixels) }) => {
    const { re, im } = out;
    for (let pixel = 0; pixel < pixels; pixel++) {
      grid.fill(0);
      let seen = 0;
      for (let k = 0, at = pixel; k < channels; k++, at += pixels) {
        const q = Q[at];
        const u = U[at];
        if (q - q !== 0 || u - u !== 0) continue;
        seen += weights[k];
        const x = q * turnRe[k] - u * turnIm[k];
        const y = q * turnIm[k] + u * turnRe[k];
        for (let tap = 0, cell = first[k]; tap < taps; tap++, cell = cell + 1 === size ? 0 : cell + 1) {
          const share = values[k * taps + tap];
          grid[2 * cell] += x * share;
          grid[2 * cell + 1] += y * share;
        }
      }
      transform.transform(spectrum, grid);
      const scale = seen > 0.5 ? 1 / seen : NaN;
      for (let index = 0, at = pixel; index < count; index++, at += pixels) {
        const cell = index < middle ? index - middle + size : index - middle;
        const factor = scale * correction[index];
        re[at] = factor * spectrum[2 * cell];
        im[at] = factor * spectrum[2 * cell + 1];
      }
    }
    return out;
  };
}

/** For every channel, the first cell of the periodic grid it touches and its share in each of `taps`. */
function spreadChannels(angles: Float64Array, size: number): { first: Int32Array; values: Float64Array } {
  const first = new Int32Array(angles.length);
  const values = new Float64Array(angles.length * taps);
  angles.forEach((angle, k) => {
    const turns = angle / (2 * Math.PI);
    const place = size * (turns - Math.floor(turns));
    const start = Math.ceil(place - taps / 2);
    first[k] = ((start % size) + size) % size;
    for (let tap = 0; tap < taps; tap++) values[k * taps + tap] = kernel((start + tap - place) / (taps / 2));
  });
  return { first, values };
}

function kernel(z: number): number {
  return Math.abs(z) > 1 ? 0 : Math.exp(sharpness * (Math.sqrt(1 - z * z) - 1));
}

/** 1 over the transform of the kernel at each index, by quadrature. */
function kernelCorrection(count: number, middle: number, size: number): Float64Array {
  const { nodes, weights } = gaussLegendre(64);
  return Float64Array.from({ length: count }, (_, index) => {
    const frequency = ((index - middle) * Math.PI * taps) / size;
    let sum = 0;
    nodes.forEach((z, k) => (sum += weights[k] * kernel(z) * Math.cos(frequency * z)));
    return 2 / (taps * sum);
  });
}
