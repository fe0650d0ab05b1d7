import type { AzimuthProfile } from '../../figure/azimuth-profile.ts';
import { overviewBox, overviewSvg, type OverviewRow } from '../../figure/overview.ts';
import { shapeDrawing } from '../../figure/shape-view.ts';
import { hypothesisStyle, lightTheme } from '../../figure/theme.ts';
import type { ColumnPicture, ObservedPicture } from '../compute/column-picture.ts';
import { mapOf, ringOf, rowLabel, steadyLimits } from '../views/row-views.ts';
import type { PageDocument, PageRow } from './page-document.ts';

/** The whole line-up as one figure (SVG), in the order of the page; rows of words are left out. */
export function lineUpSvg(page: PageDocument, observed: ObservedPicture | undefined, pictures: readonly (ColumnPicture | undefined)[], verdict: string): string {
  const any = observed ?? pictures.find((picture) => picture !== undefined);
  const withObserved = observed ? [observed] : [];
  const rows = page.rows.flatMap((row): OverviewRow[] => {
    const label = rowLabel(row, any);
    if (row.kind === 'shape') {
      const drawings = pictures.map((picture) => picture && shapeDrawing(picture.lines, picture.pose, page.shape, overviewBox, lightTheme));
      return [{ label: 'field lines', maps: [], pictures: [...withObserved.map(() => undefined), ...drawings] }];
    }
    if (row.kind === 'ring') return [{ label, maps: [], profile: profileOf(row, page, observed, pictures) }];
    if (row.kind === 'verdict') return [];
    const maps = [...withObserved, ...pictures].map((picture) => mapOf(picture, row));
    const limits = steadyLimits(maps.filter((view) => view !== undefined));
    return [{ label, maps, ...(limits && { limits }) }];
  });
  return overviewSvg({
    title: page.title,
    columns: [...withObserved.map(() => 'observation'), ...page.columns.map(({ name }) => name)],
    rows,
    notes: [...(verdict ? [verdict] : []), 'Lines show the orientation of the magnetic field as it appears (angle of the electric vector + 90°), their length P.'],
  });
}

function profileOf(row: PageRow, page: PageDocument, observed: ObservedPicture | undefined, pictures: readonly (ColumnPicture | undefined)[]): AzimuthProfile {
  const points = ringOf(observed, row);
  const curves = pictures.flatMap((picture, k) => {
    const curve = ringOf(picture, row);
    const style = hypothesisStyle(k, lightTheme);
    return curve ? [{ ...curve, label: page.columns[k].name, colour: style.colour, ...(style.dash && { dash: style.dash }) }] : [];
  });
  const map = [observed, ...pictures].map((picture) => mapOf(picture, row.band === undefined ? { kind: 'rotation-measure' } : { kind: 'polarization', band: row.band })).find((view) => view !== undefined);
  return { quantity: row.band === undefined ? 'RM' : 'P', unit: map?.map.unit ?? '', curves, ...(points && { data: [points] }) };
}
