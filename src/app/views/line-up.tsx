import type { JSX } from 'preact';
import { parse } from 'yaml';
import { useEffect, useRef, useState } from 'preact/hooks';
import { azimuthProfile } from '../../figure/azimuth-profile.ts';
import { barLabel, colourBar } from '../../figure/colour-bar.ts';
import { sharedColourScale, type ColourScale } from '../../figure/colour-scale.ts';
import { paddedDomain } from '../../figure/line-plot.ts';
import type { MapView } from '../../figure/overview.ts';
import { hypothesisStyle, pageTheme } from '../../figure/theme.ts';
import type { ColumnPicture } from '../compute/column-picture.ts';
import { addRow, changeRow, dropRow } from '../document/edits.ts';
import type { PageColumn, PageRow } from '../document/page-document.ts';
import { savePanel, type PanelKind } from '../document/panel-files.ts';
import type { Store } from '../store.ts';
import { version } from '../../files/version.ts';
import { AddColumn, ColumnHead, ObservedHead } from './column-head.tsx';
import { MapCell } from './map-cell.tsx';
import { bandOf, differenceOf, mapOf, possibleRows, ringOf, rowLabel, steadyLimits } from './row-views.ts';
import { ShapeCell } from './shape-cell.tsx';
import { SvgPicture } from './svg-picture.tsx';
import { Verdict } from './verdict.tsx';

const labelWidth = 108;
/** Padding of a cell and the frame of its picture. */
const gap = 18;

/** Columns are candidate geometries, rows are questions; the observation stands first where there is one. */
export function LineUp({ store }: { readonly store: Store }): JSX.Element {
  const { columns, rows } = store.page.value;
  const observed = store.observed.value.picture;
  const hasObserved = store.hasData.value || observed !== undefined;
  const [box, width] = useWidth();
  const count = columns.length + (hasObserved ? 1 : 0);
  const size = Math.max(128, Math.min(236, Math.floor((width - labelWidth - 44) / count) - gap));
  const any = observed ?? columns.map(({ id }) => store.columns.value[id]?.picture).find((picture) => picture !== undefined);
  return (
    <section class="line-up" ref={box} aria-label="Line-up of geometries">
      <table>
        <thead>
          <tr>
            <td />
            {hasObserved && (
              <th scope="col">
                <ObservedHead store={store} />
              </th>
            )}
            {columns.map((column, index) => (
              <th scope="col" key={column.id}>
                <ColumnHead store={store} column={column} index={index} />
              </th>
            ))}
            <td class="add">
              <AddColumn store={store} />
            </td>
          </tr>
        </thead>
        <tbody>
          {rows.map((row, index) => (
            <tr key={`${index}`}>
              <th scope="row">
                <RowHead store={store} row={row} index={index} any={any} />
              </th>
              <RowCells store={store} row={row} size={size} hasObserved={hasObserved} />
            </tr>
          ))}
        </tbody>
      </table>
      <AddRow store={store} any={any} />
    </section>
  );
}

/** The width of an element, followed as it changes. */
function useWidth(): readonly [{ readonly current: HTMLElement | null }, number] {
  const box = useRef<HTMLElement>(null);
  const [width, setWidth] = useState(1200);
  useEffect(() => {
    const watcher = new ResizeObserver(([entry]) => setWidth(entry.contentRect.width));
    if (box.current) watcher.observe(box.current);
    return () => watcher.disconnect();
  }, []);
  return [box, width];
}

interface RowHeadProps {
  readonly store: Store;
  readonly row: PageRow;
  readonly index: number;
  readonly any: Parameters<typeof rowLabel>[1];
}

/** A row's name, which is also the choice of another in its place. */
function RowHead({ store, row, index, any }: RowHeadProps): JSX.Element {
  const choices = possibleRows(any);
  const labels = choices.map((choice) => rowLabel(choice, any));
  const here = rowLabel(row, any);
  return (
    <div class="row-head">
      <select
        aria-label={`Row ${index + 1} shows`}
        value={here}
        onChange={(event) => {
          const chosen = choices[labels.indexOf(event.currentTarget.value)];
          if (chosen) store.edit(changeRow(index, chosen));
        }}
      >
        {(labels.includes(here) ? labels : [here, ...labels]).map((label) => (
          <option key={label} value={label}>
            {label}
          </option>
        ))}
      </select>
      <button type="button" class="plain quiet" aria-label={`Take the row ${here} away`} title="Take this row away" onClick={() => store.edit(dropRow(index))}>
        ✕
      </button>
      <RowScale store={store} row={row} />
    </div>
  );
}

/** The maps of a row in the order of the columns, differences taken, with the scale they share. */
function rowMaps(store: Store, row: PageRow): { readonly views: Readonly<Record<string, MapView>>; readonly scale?: ColourScale } {
  const { columns, differenceFrom } = store.page.value;
  const pictures = store.columns.value;
  const own = (id: string): MapView | undefined => mapOf(id === 'observed' ? store.observed.value.picture : pictures[id]?.picture, row);
  const reference = differenceFrom === undefined ? undefined : own(differenceFrom);
  const views: Record<string, MapView> = {};
  for (const id of ['observed', ...columns.map((column) => column.id)]) {
    const view = own(id);
    const shown = view && differenceFrom !== undefined && id !== differenceFrom ? differenceOf(view, reference) : view;
    if (shown) views[id] = shown;
  }
  return { views, scale: scaleOf(Object.entries(views).filter(([id]) => id !== differenceFrom).map(([, view]) => view)) };
}

/** The scale of the maps that have the first one's unit and kind. */
function scaleOf(views: readonly MapView[]): ColourScale | undefined {
  const [first] = views;
  if (!first) return undefined;
  const alike = views.filter(({ map }) => map.unit === first.map.unit && map.kind === first.map.kind);
  return sharedColourScale(alike.map(({ map }) => map), steadyLimits(alike));
}

function RowScale({ store, row }: { readonly store: Store; readonly row: PageRow }): JSX.Element | null {
  if (row.kind !== 'polarization' && row.kind !== 'rotation-measure') return null;
  const { scale } = rowMaps(store, row);
  if (!scale) return null;
  return <SvgPicture drawing={colourBar(scale, barLabel(scale), 104, false, pageTheme)} title={`Colours of ${row.kind}`} />;
}

interface RowCellsProps {
  readonly store: Store;
  readonly row: PageRow;
  readonly size: number;
  readonly hasObserved: boolean;
}

function RowCells({ store, row, size, hasObserved }: RowCellsProps): JSX.Element {
  const { columns } = store.page.value;
  const ids = [...(hasObserved ? ['observed'] : []), ...columns.map(({ id }) => id)];
  const maps = row.kind === 'polarization' || row.kind === 'rotation-measure' ? rowMaps(store, row) : undefined;
  return (
    <>
      {ids.map((id) => (
        <td key={id}>
          {maps ? (
            <MapOf store={store} row={row} id={id} view={maps.views[id]} scale={maps.scale} size={size} />
          ) : (
            <OtherCell store={store} row={row} id={id} size={size} column={columns.find((column) => column.id === id)} index={columns.findIndex((column) => column.id === id)} />
          )}
        </td>
      ))}
      <td />
    </>
  );
}

interface MapOfProps {
  readonly store: Store;
  readonly row: PageRow;
  readonly id: string;
  readonly view?: MapView;
  readonly scale?: ColourScale;
  readonly size: number;
}

function MapOf({ store, row, id, view, scale, size }: MapOfProps): JSX.Element | null {
  if (!view || !scale) return <Empty store={store} id={id} size={size} />;
  const isReference = view.map.kind !== scale.kind || view.map.unit !== scale.shownUnit;
  const own = isReference && view.map.kind !== scale.kind ? sharedColourScale([view.map]) : scale;
  const name = id === 'observed' ? 'observation' : (store.page.value.columns.find((column) => column.id === id)?.name ?? '');
  const isPreview = id !== 'observed' && store.columns.value[id]?.picture?.exact === false;
  return <MapCell store={store} view={view} scale={own} title={`${view.map.title}, ${name}`} sizePx={size} isPreview={isPreview} onTake={(kind) => takeMap(store, row, id, view, own, kind)} />;
}

/** Saves a map of the line-up as it is shown, differences too. */
async function takeMap(store: Store, row: PageRow, id: string, view: MapView, scale: ColourScale, kind: PanelKind): Promise<void> {
  const { columns, chosen, differenceFrom } = store.page.peek();
  const picture = id === 'observed' ? store.observed.peek().picture : store.columns.peek()[id]?.picture;
  const column = columns.find((one) => one.id === (id === 'observed' ? chosen : id)) ?? columns[0];
  if (!picture) return;
  const band = row.kind === 'polarization' ? bandOf(picture, row.band) : undefined;
  const isDifference = differenceFrom !== undefined && differenceFrom !== id;
  const quantity = `${band ? (band.isDebiased ? 'P debiased' : 'P') : 'RM'}${isDifference ? ' difference' : ''}`;
  const owner = id === 'observed' ? 'observation' : column.name;
  const name = [owner, quantity, band?.label].filter(Boolean).join(' ').toLowerCase().replace(/[^a-z0-9.]+/g, '-');
  await savePanel({ name, view, wcs: picture.wcs, quantity, scale, ...(band && { frequencyHz: band.frequencyHz }), provenance: { sceneText: column.scene, version, seed: seedOf(column.scene) } }, kind);
}

function seedOf(scene: string): number {
  try {
    return (parse(scene) as { numerics?: { seed?: number } }).numerics?.seed ?? 1;
  } catch {
    return 1;
  }
}

/** Holds the place of a picture that is still being drawn, or that cannot be. */
function Empty({ store, id, size }: { readonly store: Store; readonly id: string; readonly size: number }): JSX.Element {
  const state = id === 'observed' ? undefined : store.columns.value[id];
  const words = state?.picture || state?.trouble ? '—' : 'drawing …';
  return (
    <div class="empty" style={{ width: `${size}px`, height: `${Math.round(size * 0.6)}px` }}>
      {id === 'observed' && store.observed.value.trouble ? '—' : words}
    </div>
  );
}

interface OtherCellProps {
  readonly store: Store;
  readonly row: PageRow;
  readonly id: string;
  readonly column?: PageColumn;
  readonly index: number;
  readonly size: number;
}

function OtherCell({ store, row, id, column, index, size }: OtherCellProps): JSX.Element | null {
  const picture: ColumnPicture | undefined = column && store.columns.value[column.id]?.picture;
  if (row.kind === 'shape') {
    if (!column) return <Assumptions store={store} />;
    return picture ? (
      <div>
        <ShapeCell store={store} picture={picture} name={column.name} sizePx={size} />
        <p class="symmetry" style={{ width: `${size}px` }}>{picture.symmetry.join(' ')}</p>
      </div>
    ) : (
      <Empty store={store} id={id} size={size} />
    );
  }
  if (row.kind === 'verdict') return column ? <Verdict store={store} column={column} /> : null;
  const observed = ringOf(store.observed.value.picture, row);
  const curve = ringOf(picture, row);
  if (!curve && (column || !observed)) return <Empty store={store} id={id} size={size} />;
  const { columns } = store.page.value;
  const all = [observed, ...columns.map(({ id: one }) => ringOf(store.columns.value[one]?.picture, row))].filter((one) => one !== undefined);
  const style = hypothesisStyle(Math.max(0, index), pageTheme);
  const unit = mapOf(picture ?? store.observed.value.picture, row.band === undefined ? { kind: 'rotation-measure' } : { kind: 'polarization', band: row.band })?.map.unit ?? '';
  const drawing = azimuthProfile(
    {
      quantity: row.band === undefined ? 'RM' : 'P',
      unit,
      curves: curve ? [{ ...curve, colour: style.colour, dash: style.dash }] : [],
      data: observed ? [observed] : [],
      domain: paddedDomain(all.map(({ value, error }) => ({ values: value, error })), true),
    },
    { width: size + 8, height: Math.round(size * 0.78), legend: false, theme: pageTheme },
  );
  return <SvgPicture drawing={drawing} title={`${rowLabel(row, picture ?? store.observed.value.picture)}, ${column?.name ?? 'observation'}`} />;
}

/** What was assumed in reading the observation. */
function Assumptions({ store }: { readonly store: Store }): JSX.Element | null {
  const { picture, trouble } = store.observed.value;
  if (trouble) return <p class="trouble">{trouble.reason}</p>;
  const assumptions = [...new Set(picture?.assumptions ?? [])];
  return assumptions.length > 0 ? (
    <details class="assumed">
      <summary>{assumptions.length} things assumed</summary>
      <ul>
        {assumptions.map((sentence) => (
          <li key={sentence}>{sentence}</li>
        ))}
      </ul>
    </details>
  ) : null;
}

function AddRow({ store, any }: { readonly store: Store; readonly any: Parameters<typeof rowLabel>[1] }): JSX.Element {
  const choices = possibleRows(any);
  return (
    <select
      class="add-row"
      aria-label="Add a row"
      value=""
      onChange={(event) => {
        const chosen = choices[Number(event.currentTarget.value)];
        if (chosen) store.edit(addRow(chosen));
        event.currentTarget.value = '';
      }}
    >
      <option value="">+ row</option>
      {choices.map((choice, k) => (
        <option key={k} value={String(k)}>
          {rowLabel(choice, any)}
        </option>
      ))}
    </select>
  );
}
