import { barLabel, colourBar } from './colour-bar.ts';
import { colourLevel, type ColourScale } from './colour-scale.ts';
import { hatching } from './map-image.ts';
import { paletteBytes } from './palette.ts';
import { indexedPng, pngDataUri } from './png-image.ts';
import { element, fixed, moved, polyline, textElement } from './svg.ts';
import type { Drawing } from './svg.ts';
import type { Theme } from './theme.ts';

/** Names of the levels along one side. */
export interface LevelAxis {
  readonly label: string;
  readonly levels: readonly string[];
}

const LEFT = 64;
const BOTTOM = 38;
const BAR = 70;

/** Values over two quantities as cells of equal size, values[x level * y levels + y level]; y grows upwards, blanks are hatched. */
export function levelMap(values: ArrayLike<number>, x: LevelAxis, y: LevelAxis, scale: ColourScale, width: number, height: number, theme: Theme): Drawing {
  const [nx, ny] = [x.levels.length, y.levels.length];
  const levels = Uint8Array.from({ length: nx * ny }, (_, k) => colourLevel(scale, values[(k % nx) * ny + (ny - 1 - Math.floor(k / nx))]));
  const image = element('image', {
    x: 0, y: 0, width, height, preserveAspectRatio: 'none', 'image-rendering': 'optimizeSpeed', style: 'image-rendering:pixelated',
    href: pngDataUri(indexedPng(levels, nx, ny, paletteBytes(scale.kind))),
  });
  const small = { 'font-size': 10, fill: theme.soft };
  let [marks, texts] = ['', ''];
  for (const k of tickedLevels(nx, width / 60)) {
    const at = (width * (k + 0.5)) / nx;
    marks += polyline([[at, height], [at, height + 4]]);
    texts += textElement(at, height + 14, x.levels[k], { ...small, 'text-anchor': 'middle' });
  }
  for (const k of tickedLevels(ny, height / 24)) {
    const at = height * (1 - (k + 0.5) / ny);
    marks += polyline([[-4, at], [0, at]]);
    texts += textElement(-7, at + 3.5, y.levels[k], { ...small, 'text-anchor': 'end' });
  }
  const soft = { fill: theme.soft, 'text-anchor': 'middle' };
  const body = (levels.includes(0) ? hatching(width, height, theme.soft) : '') + image +
    element('rect', { width, height, fill: 'none', stroke: theme.soft, 'stroke-width': 0.8 }) +
    element('path', { d: marks, stroke: theme.soft, 'stroke-width': 0.8, fill: 'none' }) + texts +
    textElement(width / 2, height + 31, x.label, soft) +
    textElement(0, 0, y.label, { ...soft, transform: `translate(${fixed(12 - LEFT)},${fixed(height / 2)}) rotate(-90)` });
  const bar = colourBar(scale, barLabel(scale), height - 26, true, theme);
  return { width: LEFT + width + BAR, height: height + BOTTOM, body: moved(body, LEFT, 0) + moved(bar.body, LEFT + width + 12, 0) };
}

/** At most `most` levels, evenly apart. */
function tickedLevels(count: number, most: number): number[] {
  const step = Math.ceil(count / Math.max(2, Math.floor(most)));
  return Array.from({ length: Math.ceil(count / step) }, (_, k) => k * step);
}
