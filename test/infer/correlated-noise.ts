import FFT from 'fft.js';
import type { Beam } from '../../src/scene/types.ts';
import { beamAxes } from '../../src/infer/pixel-axes.ts';
import type { PixelAxes } from '../../src/infer/pixel-axes.ts';
import { randomStream } from '../../src/math/random.ts';

/**
 * Maps of unit Gaussian noise whose covariance between pixels is exp(-4 ln 2 d^2/FWHM^2) along the
 * beam's axes, by circulant embedding (Dietrich & Newsam 1997): the Fourier transform of the wanted
 * autocorrelation on a torus at least 4 FWHM larger than the map. Shares no code with the likelihood.
 * Each call gives `count` independent maps.
 */
export function correlatedNoise(axes: PixelAxes, beam: Beam, seed: number, count: number): Float64Array[] {
  const { nx, ny } = axes;
  const toBeam = beamAxes(axes, beam);
  const pixel = Math.hypot(axes.wcs.cd[0], axes.wcs.cd[2]) * 3600;
  const size = 2 ** Math.ceil(Math.log2(Math.max(nx, ny) + (4 * beam.majorArcsec) / pixel));
  const wrap = (i: number): number => (i > size / 2 ? i - size : i);
  const rho = new Float64Array(2 * size * size);
  for (let j = 0; j < size; j++) {
    for (let i = 0; i < size; i++) {
      const xi = toBeam.xi[0] * wrap(i) + toBeam.xi[1] * wrap(j);
      const eta = toBeam.eta[0] * wrap(i) + toBeam.eta[1] * wrap(j);
      rho[2 * (j * size + i)] = Math.exp(-4 * Math.LN2 * (xi * xi + eta * eta));
    }
  }
  const power = transform2(rho, size);
  const random = randomStream(seed, 'correlated noise');
  const maps: Float64Array[] = [];
  while (maps.length < count) {
    const modes = new Float64Array(2 * size * size);
    for (let k = 0; k < size * size; k++) {
      const amplitude = Math.sqrt(Math.max(0, power[2 * k])) / size;
      modes[2 * k] = amplitude * random.gaussian();
      modes[2 * k + 1] = amplitude * random.gaussian();
    }
    const field = transform2(modes, size);
    // Real and imaginary part are independent maps.
    for (const part of [0, 1]) {
      maps.push(Float64Array.from({ length: nx * ny }, (_, p) => field[2 * (Math.floor(p / nx) * size + (p % nx)) + part]));
    }
  }
  return maps.slice(0, count);
}

function transform2(values: Float64Array, size: number): Float64Array {
  const fft = new FFT(size);
  const result = Float64Array.from(values);
  for (const [along, across] of [[2, 2 * size], [2 * size, 2]]) {
    for (let line = 0; line < size; line++) {
      const input = new Array<number>(2 * size);
      const output = new Array<number>(2 * size);
      for (let k = 0; k < size; k++) {
        input[2 * k] = result[line * across + k * along];
        input[2 * k + 1] = result[line * across + k * along + 1];
      }
      fft.transform(output, input);
      for (let k = 0; k < size; k++) {
        result[line * across + k * along] = output[2 * k];
        result[line * across + k * along + 1] = output[2 * k + 1];
      }
    }
  }
  return result;
}
