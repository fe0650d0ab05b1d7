import type { Scene } from '../../src/scene/types.ts';
import type { SkyGrid, StokesCube } from '../../src/sky/types.ts';

/** A scene with nothing in it but its image. */
export function emptyScene(nx: number, ny: number): Scene {
  return {
    title: 'empty',
    galaxy: {
      distanceKpc: 10_000,
      inclination: 0.7,
      positionAngle: 0.4,
      volume: { radiusKpc: 15, heightKpc: 6 },
      centre: { raDeg: 150, decDeg: 20 },
    },
    field: [],
    thermalElectrons: [],
    cosmicRays: { index: 2.8, layers: [] },
    turbulence: {},
    observation: { image: { nx, ny, pixelArcsec: 4 }, bands: [], foregroundDepth: 0 },
    numerics: { tolerance: 1e-4, seed: 7, bits: 32 },
  };
}

/** A grid of pixels of 4 arcsec about a galaxy at 10 Mpc. */
export function smallGrid(nx: number, ny: number): SkyGrid {
  return {
    nx,
    ny,
    pixelArcsec: 4,
    pixelKpc: 4 * (Math.PI / 648000) * 10_000,
    raDeg: 150,
    decDeg: 20,
    crpixX: (nx + 1) / 2,
    crpixY: (ny + 1) / 2,
  };
}

/** A cube of zeros in Jy/sr. */
export function zeroCube(grid: SkyGrid, frequenciesHz: readonly number[], band = 'L'): StokesCube {
  const plane = (): Float64Array => new Float64Array(grid.nx * grid.ny * frequenciesHz.length);
  return {
    band,
    grid,
    channels: frequenciesHz.map((frequencyHz) => ({ frequencyHz, widthHz: 0 })),
    I: plane(),
    Q: plane(),
    U: plane(),
    unit: 'Jy/sr',
    noise: new Float64Array(frequenciesHz.length),
  };
}
