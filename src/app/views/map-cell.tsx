import type { JSX } from 'preact';
import { useMemo } from 'preact/hooks';
import type { ColourScale } from '../../figure/colour-scale.ts';
import { mapFrame } from '../../figure/map-frame.ts';
import { placeMap } from '../../figure/map-place.ts';
import { centrePixel } from '../../figure/panel-map.ts';
import type { MapView } from '../../figure/overview.ts';
import { moved } from '../../figure/svg.ts';
import { joinUnit, numberText } from '../../figure/number-text.ts';
import { pageTheme } from '../../figure/theme.ts';
import type { SkyCursor, Store } from '../store.ts';
import type { PanelKind } from '../document/panel-files.ts';
import { TakePanel } from './take-panel.tsx';
import { SvgPicture } from './svg-picture.tsx';

interface MapCellProps {
  readonly store: Store;
  readonly view: MapView;
  readonly scale: ColourScale;
  readonly title: string;
  readonly sizePx: number;
  readonly isPreview: boolean;
  readonly onTake?: (kind: PanelKind) => Promise<void>;
}

/** A map of the sky with the cursor that all maps share; its value is read off beside it. */
export function MapCell({ store, view, scale, title, sizePx, isPreview, onTake }: MapCellProps): JSX.Element {
  const drawing = useMemo(() => {
    const frame = mapFrame(view.map, { ...view, scale, boxWidth: sizePx, boxHeight: sizePx, axes: 'none', theme: pageTheme });
    return { width: frame.width + 2, height: frame.height + 2, body: moved(frame.body, 1, 1) };
  }, [view, scale, sizePx]);
  const place = placeMap(view.map, sizePx, sizePx);
  const cursor = store.cursor.value;
  const point = (event: PointerEvent & { readonly currentTarget: HTMLElement }): void => {
    const box = event.currentTarget.getBoundingClientRect();
    const [x, y] = [event.clientX - box.left - 1, event.clientY - box.top - 1];
    const [centreX, centreY] = place.offset(0, 0);
    store.cursor.value = { eastArcsec: (centreX - x) / place.pxPerArcsec, northArcsec: (centreY - y) / place.pxPerArcsec };
  };
  const [x, y] = cursor ? place.offset(cursor.eastArcsec, cursor.northArcsec) : [0, 0];
  const inside = cursor !== undefined && x >= 0 && y >= 0 && x <= place.width && y <= place.height;
  return (
    <div
      class={isPreview ? 'map is-preview' : 'map'}
      style={{ width: `${drawing.width}px`, height: `${drawing.height}px` }}
      onPointerMove={point}
      onPointerLeave={() => (store.cursor.value = undefined)}
    >
      <SvgPicture drawing={drawing} title={title} />
      {onTake && <TakePanel title={title} kinds={['fits', 'csv', 'svg', 'png', 'pdf']} onTake={onTake} />}
      {inside && (
        <>
          <svg class="cursor" width={drawing.width} height={drawing.height} aria-hidden="true">
            <path d={`M${x + 1},0V${drawing.height}M0,${y + 1}H${drawing.width}`} />
          </svg>
          <output class="reading">{reading(view, cursor, scale)}</output>
        </>
      )}
    </div>
  );
}

/** The value under the cursor with its unit. */
function reading({ map }: MapView, { eastArcsec, northArcsec }: SkyCursor, scale: ColourScale): string {
  const centre = centrePixel(map);
  const column = Math.round(centre.column - eastArcsec / map.pixelArcsec);
  const row = Math.round(centre.row + northArcsec / map.pixelArcsec);
  if (column < 0 || row < 0 || column >= map.nx || row >= map.ny) return '';
  const value = map.values[row * map.nx + column];
  return Number.isFinite(value) ? joinUnit(numberText(value * scale.factor), scale.shownUnit) : 'blank';
}
