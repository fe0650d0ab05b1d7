import type { StokesCube } from '../../src/sky/types.ts';
import type { Provenance } from '../../src/files/fits-scene.ts';
import { randomStream } from '../../src/math/random.ts';

/** Text that a header cannot hold as it is: other scripts, a lone surrogate aside, long lines, blanks at ends. */
export const SCENE_TEXT = [
  'gyrelight: 1   # µG, Ω, 銀河, 🌌',
  'title: "a \\\\ backslash, a \\u00b5 that is text, and \'quotes\'"',
  '',
  `field: [${'{model: axisymmetric-spiral, strength: 8 uG}, '.repeat(8)}]  `,
  '\ttab and carriage return\r',
  '',
].join('\n');

export const PROVENANCE: Provenance = { sceneText: SCENE_TEXT, version: '0.1.0', seed: 7 };

/** A small cube of seeded values with a blank, on a grid that is not square. */
export function sampleCube(frequenciesHz: readonly number[], widthsHz: readonly number[], noise: readonly number[]): StokesCube {
  const [nx, ny, pixelArcsec] = [5, 4, 3.3];
  const stream = randomStream(11, 'files/sample');
  const plane = (): Float64Array => Float64Array.from({ length: nx * ny * frequenciesHz.length }, () => stream.gaussian());
  const cube = {
    band: 'L',
    grid: { nx, ny, pixelArcsec, pixelKpc: 0.16, raDeg: 150.1, decDeg: 20.2, crpixX: (nx + 1) / 2, crpixY: (ny + 1) / 2 },
    channels: frequenciesHz.map((frequencyHz, k) => ({ frequencyHz, widthHz: widthsHz[k] })),
    I: plane(),
    Q: plane(),
    U: plane(),
    unit: 'Jy/beam' as const,
    beam: { majorArcsec: 15, minorArcsec: 12, angle: 0.5 },
    noise: Float64Array.from(noise),
  };
  cube.Q[3] = NaN;
  return cube;
}

export const EVEN_CUBE = sampleCube([1.3e9, 1.4e9, 1.5e9], [1e8, 1e8, 1e8], [2e-5, 2e-5, 2e-5]);
export const UNEVEN_CUBE = sampleCube([1.3e9, 1.45e9, 4.8e9, 8.4e9], [1e8, 5e7, 0, 2e8], [1e-5, 2e-5, 3e-5, 3e-5]);
export const SINGLE_CUBE = sampleCube([4.8e9], [1e8], [0]);
