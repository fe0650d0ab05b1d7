import { randomStream } from '../math/random.ts';
import { goodSize, multiplyImage, transformImage } from '../math/fft.ts';
import type { ComplexImage } from '../math/fft.ts';
import { beamReach, pixelBeam } from './beam.ts';
import type { PixelBeam, StokesPlanes } from './beam.ts';
import { wcsFromGrid } from './grid.ts';
import type { StokesCube } from './types.ts';

const stokesNames = ['I', 'Q', 'U'] as const;

/**
 * A cube with Gaussian noise of `rms` (in the cube's unit) added to I, Q and U of every channel,
 * independent of each other. With a beam its autocorrelation is the beam's shape, without one it is
 * white. Stream: (seed, `noise/<band>/<stokes>`, channel). Adds to noise that the cube states already.
 */
export function addNoise(cube: StokesCube, rms: number, seed: number): StokesCube {
  const noisy = { I: cube.I.slice(), Q: cube.Q.slice(), U: cube.U.slice() };
  noiseAdder(cube, rms, seed)(noisy, 0);
  return { ...cube, ...noisy, noise: cube.noise.map((before) => Math.hypot(before, rms)) };
}

/** Adds the noise of a band's channels, the first of which is `from`, to planes of them, [(channel - from) * pixels + pixel]. */
export type NoiseAdder = (planes: StokesPlanes, from: number) => void;

/** Makes a function that adds that noise in place to some of a band's channels: the same whichever are asked for together. */
export function noiseAdder({ band, grid, beam }: Pick<StokesCube, 'band' | 'grid' | 'beam'>, rms: number, seed: number): NoiseAdder {
  const { nx, ny } = grid;
  const draw = noiseMaker(nx, ny, beam && pixelBeam(beam, wcsFromGrid(grid).cd));
  return (stokesPlanes, from) => {
    for (const stokes of stokesNames) {
      const planes = stokesPlanes[stokes];
      for (let start = 0, channel = from; start < planes.length; start += nx * ny, channel++) {
        const noise = draw(randomStream(seed, `noise/${band}/${stokes}`, channel).gaussian);
        for (let k = 0; k < noise.length; k++) planes[start + k] += rms * noise[k];
      }
    }
  };
}

/**
 * A function that draws planes of noise, nx x ny, of unit ensemble rms from a stream of Gaussian
 * numbers: white noise filtered by the square root of the beam's transfer function on a periodic
 * plane so large that no correlation comes round (circulant embedding, Dietrich & Newsam 1997).
 * Without a beam the numbers themselves, in pixel order.
 */
export function noiseMaker(nx: number, ny: number, beam?: PixelBeam): (gaussian: () => number) => Float64Array {
  if (!beam) return (gaussian) => drawPlane(nx * ny, gaussian);
  const reach = beamReach(beam);
  const width = goodSize(Math.max(nx + reach.x, 2 * reach.x));
  const height = goodSize(Math.max(ny + reach.y, 2 * reach.y));
  const filter = noiseFilter(beam, width, height);
  return (gaussian) => {
    const image: ComplexImage = {
      width,
      height,
      real: drawPlane(width * height, gaussian),
      imaginary: new Float64Array(width * height),
    };
    transformImage(image, 'forward');
    multiplyImage(image, filter);
    transformImage(image, 'inverse');
    const noise = new Float64Array(nx * ny);
    for (let row = 0; row < ny; row++) {
      noise.set(image.real.subarray(row * width, row * width + nx), row * nx);
    }
    return noise;
  };
}

function drawPlane(length: number, gaussian: () => number): Float64Array {
  const plane = new Float64Array(length);
  for (let k = 0; k < length; k++) plane[k] = gaussian();
  return plane;
}

/**
 * Square root of the transform of the autocorrelation exp(-d^T C^-1 d / 2) *sampled at the pixels*:
 * for a well sampled beam its transfer function but for a factor, and for a narrow one still exact.
 */
function noiseFilter({ xx, xy, yy }: PixelBeam, width: number, height: number): Float64Array {
  const image: ComplexImage = {
    width,
    height,
    real: new Float64Array(width * height),
    imaginary: new Float64Array(width * height),
  };
  const determinant = xx * yy - xy * xy;
  for (let row = 0, k = 0; row < height; row++) {
    const y = row < height / 2 ? row : row - height;
    for (let column = 0; column < width; column++, k++) {
      const x = column < width / 2 ? column : column - width;
      image.real[k] = Math.exp(-(yy * x * x - 2 * xy * x * y + xx * y * y) / (2 * determinant));
    }
  }
  transformImage(image, 'forward');
  return image.real.map((power) => Math.sqrt(Math.max(power, 0)));
}
