import { colourLevel } from './colour-scale.ts';
import type { ColourScale } from './colour-scale.ts';
import { paletteBytes } from './palette.ts';
import type { PanelMap } from './panel-map.ts';
import { indexedPng, pngDataUri } from './png-image.ts';
import { element, polyline } from './svg.ts';

/** Distance between hatch lines, px. */
const HATCH_STEP = 6;

/**
 * The map as an embedded image over `width` x `height` px, one image pixel a map pixel, north up and
 * east left. Where it is blank, hatching shows through.
 */
export function mapImage(map: PanelMap, scale: ColourScale, width: number, height: number, hatchColour: string): string {
  const { nx, ny } = map;
  const levels = new Uint8Array(nx * ny);
  let blank = false;
  for (let row = 0; row < ny; row++) {
    for (let column = 0; column < nx; column++) {
      const level = colourLevel(scale, map.values[row * nx + column]);
      levels[(ny - 1 - row) * nx + column] = level;
      blank ||= level === 0;
    }
  }
  const image = element('image', {
    x: 0,
    y: 0,
    width,
    height,
    preserveAspectRatio: 'none',
    'image-rendering': 'optimizeSpeed',
    style: 'image-rendering:pixelated',
    href: pngDataUri(indexedPng(levels, nx, ny, paletteBytes(scale.kind))),
  });
  return (blank ? hatching(width, height, hatchColour) : '') + image;
}

/** Diagonal lines over a rectangle from (0, 0), cut at its edges. */
export function hatching(width: number, height: number, colour: string): string {
  let path = '';
  for (let sum = HATCH_STEP; sum < width + height; sum += HATCH_STEP) {
    path += polyline([
      [Math.min(sum, width), Math.max(0, sum - width)],
      [Math.max(0, sum - height), Math.min(sum, height)],
    ]);
  }
  return element('path', { class: 'hatch', d: path, stroke: colour, 'stroke-width': 0.8, 'stroke-opacity': 0.55, fill: 'none' });
}
