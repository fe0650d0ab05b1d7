import type { AzimuthValues } from '../../figure/azimuth-profile.ts';
import type { MapView } from '../../figure/overview.ts';
import type { BandPicture, ColumnPicture, ObservedPicture } from '../compute/column-picture.ts';
import type { PageRow } from '../document/page-document.ts';

type Picture = ColumnPicture | ObservedPicture;

/** A band by its place from the longest wavelength, from the other end where negative. */
export function bandOf({ bands }: Pick<Picture, 'bands'>, band: number | undefined): BandPicture | undefined {
  return bands.at(band ?? 0);
}

/** The map that a row shows of a column; undefined where the row shows none. */
export function mapOf(picture: Picture | undefined, row: PageRow): MapView | undefined {
  if (!picture) return undefined;
  if (row.kind === 'polarization') return bandOf(picture, row.band)?.polarization;
  return row.kind === 'rotation-measure' ? picture.rotationMeasure : undefined;
}

/** What a row's profile shows of a column: P of a band, or RM where the row names none. */
export function ringOf(picture: Picture | undefined, row: PageRow): AzimuthValues | undefined {
  if (!picture) return undefined;
  return row.band === undefined ? picture.rotationMeasureRing : bandOf(picture, row.band)?.ring;
}

/** A map less another of the same size and unit, on a signed scale; undefined where they do not match. */
export function differenceOf(view: MapView, other: MapView | undefined): MapView | undefined {
  if (!other || other.map.nx !== view.map.nx || other.map.ny !== view.map.ny || other.map.unit !== view.map.unit) return undefined;
  const values = Float64Array.from(view.map.values, (value, k) => value - other.map.values[k]);
  return { map: { ...view.map, values, kind: 'signed', title: `${view.map.title}, difference` }, rings: view.rings };
}

/** The label of a row, such as `P, 1.40 GHz`, by the bands of any column. */
export function rowLabel(row: PageRow, any: Picture | undefined): string {
  const band = any && row.band !== undefined ? bandOf(any, row.band)?.label : undefined;
  const named = band ?? (row.band === undefined ? '' : `band ${row.band + 1}`);
  switch (row.kind) {
    case 'shape':
      return 'shape';
    case 'polarization':
      return `P, ${named}`;
    case 'rotation-measure':
      return 'RM';
    case 'ring':
      return row.band === undefined ? 'RM round the ring' : `P round the ring, ${named}`;
    case 'verdict':
      return 'verdict';
  }
}

/** Every row that could be shown of these bands. */
export function possibleRows(any: Picture | undefined): readonly PageRow[] {
  const bands = any?.bands.map((_, band) => band) ?? [];
  return [
    { kind: 'shape' },
    ...bands.map((band): PageRow => ({ kind: 'polarization', band })),
    { kind: 'rotation-measure' },
    ...bands.map((band): PageRow => ({ kind: 'ring', band })),
    { kind: 'ring' },
    { kind: 'verdict' },
  ];
}

/**
 * Ends of a row's colours that one column with a wild nucleus cannot set and so darken all others:
 * intensities run to the first map's largest or to the median of the largest, whichever is more.
 * Undefined for other kinds of map.
 */
export function steadyLimits(views: readonly MapView[]): readonly [number, number] | undefined {
  if (views[0]?.map.kind !== 'intensity') return undefined;
  const largest = views.map(({ map }) => largestOf(map.values));
  const middle = [...largest].sort((a, b) => a - b)[largest.length >> 1];
  const top = Math.max(largest[0], middle);
  return top > 0 ? [0, top] : undefined;
}

function largestOf(values: ArrayLike<number>): number {
  let largest = 0;
  for (let k = 0; k < values.length; k++) if (values[k] > largest) largest = values[k];
  return largest;
}
