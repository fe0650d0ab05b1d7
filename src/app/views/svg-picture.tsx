import type { JSX } from 'preact';
import { svgDocument, type Drawing } from '../../figure/svg.ts';
import { pageTheme } from '../../figure/theme.ts';

/** A drawing of `figure/` on the page: the same marks that its files hold. */
export function SvgPicture({ drawing, title }: { readonly drawing: Drawing; readonly title: string }): JSX.Element {
  return <div class="picture" dangerouslySetInnerHTML={{ __html: svgDocument(drawing, { title, ink: pageTheme.ink }) }} />;
}
