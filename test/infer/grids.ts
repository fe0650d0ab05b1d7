import type { PixelAxes } from '../../src/infer/pixel-axes.ts';
import type { DataPlane, DataSet } from '../../src/infer/types.ts';

/** A north-up grid of square pixels about RA 150 deg, Dec 20 deg; turned by `angle` (rad) if given. */
export function testAxes(nx: number, ny: number, pixelArcsec = 4, angle = 0): PixelAxes {
  const [c, s] = [(Math.cos(angle) * pixelArcsec) / 3600, (Math.sin(angle) * pixelArcsec) / 3600];
  return {
    nx,
    ny,
    wcs: { projection: 'SIN', raDeg: 150, decDeg: 20, crpixX: (nx + 1) / 2, crpixY: (ny + 1) / 2, cd: [-c, s, s, c] },
  };
}

/** A data set of given planes in one band of one channel. */
export function testData(axes: PixelAxes, planes: readonly Partial<DataPlane>[]): DataSet {
  return {
    axes,
    unit: 'Jy/beam',
    bands: [{ name: '1.4 GHz', channels: [{ frequencyHz: 1.4e9, widthHz: 0 }] }],
    planes: planes.map((plane) => ({
      quantity: 'Q', band: 0, channel: 0, values: new Float64Array(axes.nx * axes.ny), noise: 1, ...plane,
    })),
    assumptions: [],
  };
}
