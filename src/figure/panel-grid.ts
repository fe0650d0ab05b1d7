import { moved, textElement, textWidth } from './svg.ts';
import type { Drawing } from './svg.ts';

/** A drawing with a title above it. */
export interface TitledDrawing {
  readonly title: string;
  readonly drawing: Drawing;
}

const GAP = 18;
const TITLE = 20;

/** Drawings in rows of `columns`, titled, under a heading where one is given. */
export function panelGrid(panels: readonly TitledDrawing[], columns: number, heading = '', above?: Drawing): Drawing {
  const wide = Math.max(0, ...panels.map(({ drawing }) => drawing.width));
  const top = (heading ? 30 : 6) + (above ? above.height + 8 : 0);
  let [body, y] = ['', top];
  if (heading) body += textElement(GAP, 22, heading, { 'font-size': 15, 'font-weight': 600 });
  if (above) body += moved(above.body, GAP, heading ? 34 : 6);
  for (let start = 0; start < panels.length; start += columns) {
    const row = panels.slice(start, start + columns);
    row.forEach(({ title, drawing }, k) => {
      const x = GAP + k * (wide + GAP);
      body += textElement(x, y + 13, title, { 'font-size': 12, 'font-weight': 600 }) + moved(drawing.body, x, y + TITLE);
    });
    y += TITLE + Math.max(...row.map(({ drawing }) => drawing.height)) + GAP;
  }
  const width = Math.max(Math.min(columns, Math.max(1, panels.length)) * (wide + GAP) + GAP, textWidth(heading, 15) + 2 * GAP, (above?.width ?? 0) + 2 * GAP);
  return { width, height: y, body };
}
