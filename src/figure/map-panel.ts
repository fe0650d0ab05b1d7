import { barLabel, colourBar } from './colour-bar.ts';
import { sharedColourScale } from './colour-scale.ts';
import type { ColourScale } from './colour-scale.ts';
import { mapFrame } from './map-frame.ts';
import type { MapAxes, MapLayers } from './map-frame.ts';
import type { PanelMap } from './panel-map.ts';
import { moved, svgDocument, textElement, textWidth } from './svg.ts';
import type { Drawing } from './svg.ts';
import { lightTheme } from './theme.ts';
import type { Theme } from './theme.ts';

export interface MapPanelOptions extends MapLayers {
  /** Longer side of the map, px; 360 where left out. */
  readonly size?: number;
  /** arcsec where left out. */
  readonly axes?: MapAxes;
  /** Shared with other maps; made from this one where left out. */
  readonly scale?: ColourScale;
  readonly theme?: Theme;
}

/** One map with title, axes, layers and colour bar. */
export function mapPanel(map: PanelMap, options: MapPanelOptions = {}): Drawing {
  const { size = 360, axes = 'arcsec', theme = lightTheme } = options;
  const scale = options.scale ?? sharedColourScale([map]);
  const frame = mapFrame(map, { ...options, boxWidth: size, boxHeight: size, axes, scale, theme });
  const left = axes === 'none' ? 10 : 58;
  const top = 30;
  const bottom = axes === 'none' ? 12 : 38;
  const bar = colourBar(scale, barLabel(scale), frame.height - 26, true, theme);
  const titleWidth = left + textWidth(map.title, 13);
  const unit = axes === 'kpc' ? 'kpc' : 'arcsec';
  const soft = { fill: theme.soft, 'text-anchor': 'middle' };
  const axisTitles =
    axes === 'none'
      ? ''
      : textElement(left + frame.width / 2, top + frame.height + 31, `offset east (${unit})`, soft) +
        textElement(0, 0, northTitle(frame.height, unit), { ...soft, transform: `translate(14,${(top + frame.height / 2).toFixed(1)}) rotate(-90)` });
  return {
    width: Math.max(left + frame.width + 16 + bar.width + 10, titleWidth + 10),
    height: top + frame.height + bottom,
    body:
      textElement(left, 18, map.title, { 'font-size': 13, 'font-weight': 600 }) +
      moved(frame.body, left, top) +
      moved(bar.body, left + frame.width + 16, top) +
      axisTitles,
  };
}

/** Title of the upright axis, shorter beside a low map. */
export function northTitle(height: number, unit: string): string {
  return height < 130 ? `north (${unit})` : `offset north (${unit})`;
}

/** `mapPanel` as a whole SVG file. */
export function mapPanelSvg(map: PanelMap, options: MapPanelOptions = {}): string {
  const theme = options.theme ?? lightTheme;
  return svgDocument(mapPanel(map, options), { title: map.title, ink: theme.ink, paper: theme.paper });
}
