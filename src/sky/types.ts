import type { Beam } from '../scene/types.ts';

/**
 * A sky image grid in the order of FITS: index = row * nx + column, row 0 south, column 0 east.
 * Offsets are direction cosines (SIN projection) times distance.
 */
export interface SkyGrid {
  readonly nx: number;
  readonly ny: number;
  readonly pixelArcsec: number;
  /** Pixel size at the galaxy's distance. */
  readonly pixelKpc: number;
  /** Sky position of the reference pixel (galaxy's centre), degrees; 0, 0 where none was given. */
  readonly raDeg: number;
  readonly decDeg: number;
  /** Reference pixel, 1-based as in FITS; (n+1)/2 for grids made by a scene. */
  readonly crpixX: number;
  readonly crpixY: number;
}

export interface Channel {
  readonly frequencyHz: number;
  readonly widthHz: number;
}

export type BrightnessUnit = 'Jy/beam' | 'Jy/sr';

/** Stokes I, Q, U of one band: arrays [channel * ny * nx + row * nx + column]. NaN is blank. */
export interface StokesCube {
  readonly band: string;
  readonly grid: SkyGrid;
  readonly channels: readonly Channel[];
  readonly I: Float64Array;
  readonly Q: Float64Array;
  readonly U: Float64Array;
  readonly unit: BrightnessUnit;
  readonly beam?: Beam;
  /** Noise rms per channel in `unit`; 0 where there is none. */
  readonly noise: Float64Array;
}
