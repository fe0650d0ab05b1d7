import type { ColourScale } from './colour-scale.ts';
import { paletteBytes } from './palette.ts';
import { indexedPng, pngDataUri } from './png-image.ts';
import { element, moved, polyline, textElement, textWidth } from './svg.ts';
import type { Drawing } from './svg.ts';
import type { Theme } from './theme.ts';
import { tidyTicks } from './ticks.ts';
import type { Tick } from './ticks.ts';

const THICKNESS = 9;
const TICK = 3;
const TYPE = 10;

/**
 * A colour bar `length` px long, with ticks and its label (quantity and unit). Pointed where values
 * lie beyond its end. Vertical: label above; horizontal: label below.
 */
export function colourBar(scale: ColourScale, label: string, length: number, upright: boolean, theme: Theme): Drawing {
  const ticks = barTicks(scale, upright ? length / 32 : length / 48);
  const tip = 6;
  const bar = image(scale, length, upright) + tips(scale, length, tip, upright, theme);
  const [low, high] = scale.limits;
  const at = (tick: Tick): number => {
    const t = (tick.value / scale.factor - low) / (high - low);
    return upright ? length * (1 - t) : length * t;
  };
  if (upright) {
    const head = (label ? 14 : 0) + tip;
    const marks = ticks.map((tick) =>
      element('path', { d: polyline([[THICKNESS, at(tick)], [THICKNESS + TICK, at(tick)]]), stroke: theme.soft, 'stroke-width': 0.8 }) +
      textElement(THICKNESS + TICK + 3, at(tick) + 3.5, tick.label, { 'font-size': TYPE, fill: theme.soft }),
    );
    const width = THICKNESS + TICK + 3 + Math.max(0, ...ticks.map((tick) => textWidth(tick.label, TYPE)));
    const title = label ? textElement(0, 9, label, { 'font-size': TYPE, fill: theme.soft }) : '';
    return { width: Math.max(width, textWidth(label, TYPE)), height: length + head + tip, body: title + moved(bar + marks.join(''), 0, head) };
  }
  const marks = ticks.map((tick) =>
    element('path', { d: polyline([[at(tick), THICKNESS], [at(tick), THICKNESS + TICK]]), stroke: theme.soft, 'stroke-width': 0.8 }) +
    textElement(at(tick), THICKNESS + TICK + 10, tick.label, { 'font-size': TYPE, fill: theme.soft, 'text-anchor': 'middle' }),
  );
  const side = 12;
  const title = textElement(length / 2, THICKNESS + TICK + 24, label, { 'font-size': TYPE, fill: theme.soft, 'text-anchor': 'middle' });
  return { width: length + 2 * side, height: THICKNESS + TICK + 28, body: moved(bar + marks.join('') + title, side, 0) };
}

/** What a bar says beside its ticks: the unit, or nothing where the ticks carry it. */
export function barLabel(scale: ColourScale): string {
  return scale.kind === 'angle' ? '' : scale.shownUnit;
}

/** Ticks in shown units; angles at quarters of the half turn. */
function barTicks(scale: ColourScale, count: number): readonly Tick[] {
  const [low, high] = scale.limits.map((limit) => limit * scale.factor);
  if (scale.kind !== 'angle') return tidyTicks(low, high, Math.max(3, Math.round(count)));
  return [0, 1, 2, 3, 4].map((quarter) => {
    const value = low + ((high - low) * quarter) / 4;
    return { value, label: `${Math.round(value)}°` };
  });
}

function image(scale: ColourScale, length: number, upright: boolean): string {
  const levels = Uint8Array.from({ length: 255 }, (_, k) => (upright ? 255 - k : k + 1));
  const png = upright ? indexedPng(levels, 1, 255, paletteBytes(scale.kind)) : indexedPng(levels, 255, 1, paletteBytes(scale.kind));
  return element('image', {
    x: 0, y: 0, width: upright ? THICKNESS : length, height: upright ? length : THICKNESS,
    preserveAspectRatio: 'none', 'image-rendering': 'optimizeSpeed', style: 'image-rendering:pixelated', href: pngDataUri(png),
  });
}

/** Triangles in the colours of the ends where values lie beyond them. */
function tips(scale: ColourScale, length: number, tip: number, upright: boolean, theme: Theme): string {
  const palette = paletteBytes(scale.kind);
  const colour = (level: number): string => `rgb(${palette.subarray(3 * level, 3 * level + 3).join(',')})`;
  const triangle = (base: number, point: number, level: number): string => {
    const corners: readonly (readonly [number, number])[] = upright
      ? [[0, base], [THICKNESS, base], [THICKNESS / 2, point]]
      : [[base, 0], [base, THICKNESS], [point, THICKNESS / 2]];
    return element('path', { class: 'beyond', d: polyline(corners, true), fill: colour(level), stroke: theme.soft, 'stroke-width': 0.4 });
  };
  const [below, above] = scale.beyond;
  const [start, end] = upright ? [length, 0] : [0, length];
  const outward = upright ? tip : -tip;
  return (below ? triangle(start, start + outward, 1) : '') + (above ? triangle(end, end - outward, 255) : '');
}
