import { randomStream } from '../math/random.ts';
import { goodSize, multiplyImage, transformImage } from '../math/fft.ts';
import type { ComplexImage } from '../math/fft.ts';
import { beamReach, pixelBeam } from './beam.ts';
import type { PixelBeam } from './beam.ts';
import { wcsFromGrid } from './grid.ts';
import type { StokesCube } from './types.ts';

const stokesNames = ['I', 'Q', 'U'] as const;

/**
 * A cube with Gaussian noise of `rms` (in the cube's unit) added to I, Q and U of every channel,
 * independent of each other. With a beam its autocorrelation is the beam's shape, without one it is
 * white. Stream: (seed, `noise/<band>/<stokes>`, channel). Adds to noise that the cube states already.
 */
export function addNoise(cube: StokesCube, rms: number, seed: number): StokesCube {
  const { nx, ny } = cube.grid;
  const draw = noiseMaker(nx, ny, cube.beam && pixelBeam(cube.beam, wcsFromGrid(cube.grid).cd));
  const [I, Q, U] = stokesNames.map((stokes) => {
    const planes = cube[stokes].slice();
    for (let channel = 0; channel < cube.channels.length; channel++) {
      const stream = randomStream(seed, `noise/${cube.band}/${stokes}`, channel);
      const noise = draw(stream.gaussian);
      for (let k = 0; k < noise.length; k++) planes[channel * nx * ny + k] += rms * noise[k];
    }
    return planes;
  });
  return { ...cube, I, Q, U, noise: cube.noise.map((before) => Math.hypot(before, rms)) };
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
