import type { JSX } from 'preact';
import { useEffect, useRef } from 'preact/hooks';
import { shapeStrokes } from '../../figure/shape-view.ts';
import { darkTheme, lightTheme } from '../../figure/theme.ts';
import type { ColumnPicture } from '../compute/column-picture.ts';
import type { Store } from '../store.ts';

interface ShapeCellProps {
  readonly store: Store;
  readonly picture: ColumnPicture;
  readonly name: string;
  readonly sizePx: number;
}

/** Radians turned by a drag of one px, and by one press of an arrow key. */
const perPixel = 0.01;
const perKey = Math.PI / 36;

/**
 * Field lines in three dimensions, drawn on a plain canvas so that no graphics card is needed. A drag
 * or the arrow keys turn all columns together; Home brings back the observer's view.
 */
export function ShapeCell({ store, picture, name, sizePx }: ShapeCellProps): JSX.Element {
  const canvas = useRef<HTMLCanvasElement>(null);
  const { shape, theme } = store.page.value;
  useEffect(() => {
    const request = requestAnimationFrame(() => {
      if (canvas.current) paint(canvas.current, picture, shape, sizePx, theme);
    });
    return () => cancelAnimationFrame(request);
  }, [picture, shape, sizePx, theme]);
  const turnBy = (turn: number, tilt: number): void =>
    store.edit((page) => ({ ...page, shape: { ...page.shape, turn: page.shape.turn + turn, tilt: limited(page.shape.tilt + tilt) } }), 'turn');
  const onKey = (event: KeyboardEvent): void => {
    const steps: Readonly<Record<string, readonly [number, number]>> = {
      ArrowLeft: [-perKey, 0], ArrowRight: [perKey, 0], ArrowUp: [0, -perKey], ArrowDown: [0, perKey],
    };
    if (event.key === 'Home') store.edit((page) => ({ ...page, shape: { ...page.shape, turn: 0, tilt: 0 } }));
    else if (steps[event.key]) turnBy(...steps[event.key]);
    else return;
    event.preventDefault();
  };
  const degrees = (angle: number): string => `${Math.round((angle * 180) / Math.PI)}°`;
  return (
    <canvas
      ref={canvas}
      class="shape"
      tabIndex={0}
      role="img"
      aria-label={`Field lines of ${name}, turned by ${degrees(shape.turn)} and tilted by ${degrees(shape.tilt)} from the observer's view; arrow keys turn, Home turns back`}
      style={{ width: `${sizePx}px`, height: `${sizePx}px` }}
      onKeyDown={onKey}
      onDblClick={() => store.edit((page) => ({ ...page, shape: { ...page.shape, turn: 0, tilt: 0 } }))}
      onPointerDown={(event) => event.currentTarget.setPointerCapture(event.pointerId)}
      onPointerMove={(event) => {
        if (event.buttons === 1) turnBy(event.movementX * perPixel, event.movementY * perPixel);
      }}
      onPointerUp={store.settle}
    />
  );
}

function limited(tilt: number): number {
  return Math.max(-Math.PI / 2, Math.min(Math.PI / 2, tilt));
}

function paint(canvas: HTMLCanvasElement, picture: ColumnPicture, shape: Parameters<typeof shapeStrokes>[2], size: number, themeName: 'light' | 'dark'): void {
  const context = canvas.getContext('2d');
  if (!context) return;
  const theme = themeName === 'light' ? lightTheme : darkTheme;
  const ratio = devicePixelRatio || 1;
  canvas.width = canvas.height = Math.round(size * ratio);
  context.setTransform(ratio, 0, 0, ratio, 0, 0);
  context.lineCap = 'round';
  for (const { points, colour, width } of shapeStrokes(picture.lines, picture.pose, shape, size)) {
    context.strokeStyle = colour === 'rule' || colour === 'soft' ? theme[colour] : colour;
    context.lineWidth = width;
    context.beginPath();
    points.forEach(([x, y], k) => (k ? context.lineTo(x, y) : context.moveTo(x, y)));
    context.stroke();
  }
}
