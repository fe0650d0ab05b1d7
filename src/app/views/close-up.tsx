import type { JSX } from 'preact';
import { useEffect, useRef, useState } from 'preact/hooks';
import { barLabel, colourBar } from '../../figure/colour-bar.ts';
import { sharedColourScale } from '../../figure/colour-scale.ts';
import { linePlot } from '../../figure/line-plot.ts';
import { mapFrame } from '../../figure/map-frame.ts';
import { placeMap } from '../../figure/map-place.ts';
import { numberText } from '../../figure/number-text.ts';
import type { MapView } from '../../figure/overview.ts';
import { sightlineDrawing } from '../../figure/sightline-plot.ts';
import { moved } from '../../figure/svg.ts';
import { hypothesisStyle, pageTheme } from '../../figure/theme.ts';
import type { PlacePicture } from '../compute/work-place.ts';
import { findColumn } from '../document/page-document.ts';
import type { Store } from '../store.ts';
import { mapOf } from './row-views.ts';
import { ShapeCell } from './shape-cell.tsx';
import { SvgPicture } from './svg-picture.tsx';

const mapSize = 340;
const arcsec = Math.PI / 648000;

/** One column looked at closely: its maps, and one place of it through and through. */
export function CloseUp({ store, id }: { readonly store: Store; readonly id: string }): JSX.Element | null {
  const dialog = useRef<HTMLDialogElement>(null);
  const [band, setBand] = useState('0');
  const [place, setPlace] = useState<{ readonly eastArcsec: number; readonly northArcsec: number } | undefined>();
  const [seen, setSeen] = useState<PlacePicture | undefined>();
  const [wrong, setWrong] = useState('');
  const column = findColumn(store.page.value, id);
  const picture = store.columns.value[id]?.picture;
  useEffect(() => {
    if (dialog.current && !dialog.current.open) dialog.current.showModal();
  }, []);
  const pose = picture?.pose;
  const at = place ?? (pose && startingPlace(pose));
  useEffect(() => {
    if (!column || !pose || !at) return;
    const perArcsec = arcsec * pose.distanceKpc;
    void store.lookAt(column.name, column.scene, at.northArcsec * perArcsec, at.eastArcsec * perArcsec).then((outcome) => {
      if ('value' in outcome) {
        setSeen(outcome.value);
        setWrong('');
      } else if ('trouble' in outcome) setWrong(outcome.trouble.reason);
    });
  }, [column?.scene, pose?.distanceKpc, at?.eastArcsec, at?.northArcsec]);
  if (!column) return null;
  const close = (): void => {
    store.closeUp.value = undefined;
  };
  const view = picture && (band === 'RM' ? picture.rotationMeasure : mapOf(picture, { kind: 'polarization', band: Number(band) }));
  return (
    <dialog ref={dialog} class="close-up" aria-label={`Close-up of ${column.name}`} onClose={close} onCancel={close}>
      <div class="close-up-bar">
        <h2>{column.name}</h2>
        <label>
          map{' '}
          <select value={band} onChange={(event) => setBand(event.currentTarget.value)}>
            {picture?.bands.map(({ label }, k) => (
              <option key={label} value={String(k)}>
                P, {label}
              </option>
            ))}
            {picture?.rotationMeasure && <option value="RM">RM</option>}
          </select>
        </label>
        <span class="soft">{at && `at ${numberText(at.eastArcsec, 3)}″ east, ${numberText(at.northArcsec, 3)}″ north; click the map or use its arrow keys to look elsewhere`}</span>
        <button type="button" onClick={() => dialog.current?.close()}>
          back to the line-up
        </button>
      </div>
      {wrong && <p class="trouble" role="alert">{wrong}</p>}
      <div class="close-up-panels">
        <section aria-label="Sky">{view && at && <PlacePicker view={view} at={at} onPick={setPlace} />}</section>
        <section aria-label="Sightline">
          {seen?.sightline ? <SvgPicture drawing={sightlineDrawing(seen.sightline, pageTheme)} title="The line of sight" /> : <p class="soft">This line of sight misses the galaxy.</p>}
        </section>
        <section aria-label="Shape">
          {picture && <ShapeCell store={store} picture={picture} name={column.name} sizePx={mapSize} />}
          <label class="soft">
            colour by{' '}
            <select
              value={store.page.value.shape.colourBy}
              onChange={(event) => {
                const colourBy = event.currentTarget.value === 'strength' ? 'strength' : 'line-of-sight';
                store.edit((page) => ({ ...page, shape: { ...page.shape, colourBy } }));
              }}
            >
              <option value="strength">strength</option>
              <option value="line-of-sight">towards or away from us</option>
            </select>
          </label>
        </section>
        <section aria-label="Against wavelength">{seen && <Spectra seen={seen} />}</section>
      </div>
    </dialog>
  );
}

/** Halfway out on the approaching half of the major axis. */
function startingPlace({ positionAngle, radiusKpc, distanceKpc }: { readonly positionAngle: number; readonly radiusKpc: number; readonly distanceKpc: number }): {
  readonly eastArcsec: number;
  readonly northArcsec: number;
} {
  const offset = (-0.35 * radiusKpc) / distanceKpc / arcsec;
  return { eastArcsec: Math.round(offset * Math.sin(positionAngle)), northArcsec: Math.round(offset * Math.cos(positionAngle)) };
}

interface PlacePickerProps {
  readonly view: MapView;
  readonly at: { readonly eastArcsec: number; readonly northArcsec: number };
  readonly onPick: (place: { readonly eastArcsec: number; readonly northArcsec: number }) => void;
}

/** A map on which a place is picked with the mouse or the arrow keys. */
function PlacePicker({ view, at, onPick }: PlacePickerProps): JSX.Element {
  const scale = sharedColourScale([view.map]);
  const frame = mapFrame(view.map, { ...view, scale, boxWidth: mapSize, boxHeight: mapSize, axes: 'arcsec', theme: pageTheme });
  const bar = colourBar(scale, barLabel(scale), mapSize - 30, true, pageTheme);
  const [left, top] = [46, 6];
  const drawing = { width: left + frame.width + 78, height: top + frame.height + 34, body: moved(frame.body, left, top) + moved(bar.body, left + frame.width + 14, top) };
  const place = placeMap(view.map, mapSize, mapSize);
  const [x, y] = place.offset(at.eastArcsec, at.northArcsec);
  const pick = (event: PointerEvent & { readonly currentTarget: HTMLElement }): void => {
    const box = event.currentTarget.getBoundingClientRect();
    const [centreX, centreY] = place.offset(0, 0);
    const [px, py] = [event.clientX - box.left - left, event.clientY - box.top - top];
    if (px < 0 || py < 0 || px > place.width || py > place.height) return;
    onPick({ eastArcsec: (centreX - px) / place.pxPerArcsec, northArcsec: (centreY - py) / place.pxPerArcsec });
  };
  const step = view.map.pixelArcsec;
  const onKey = (event: KeyboardEvent): void => {
    const steps: Readonly<Record<string, readonly [number, number]>> = { ArrowLeft: [step, 0], ArrowRight: [-step, 0], ArrowUp: [0, step], ArrowDown: [0, -step] };
    const by = steps[event.key];
    if (!by) return;
    event.preventDefault();
    onPick({ eastArcsec: at.eastArcsec + by[0], northArcsec: at.northArcsec + by[1] });
  };
  return (
    <div
      class="picker"
      tabIndex={0}
      role="application"
      aria-label={`Map of ${view.map.title}; place ${at.eastArcsec.toFixed(1)} arcsec east, ${at.northArcsec.toFixed(1)} arcsec north; arrow keys move it`}
      onPointerDown={pick}
      onPointerMove={(event) => {
        if (event.buttons === 1) pick(event);
      }}
      onKeyDown={onKey}
    >
      <SvgPicture drawing={drawing} title={view.map.title} />
      <svg class="cursor" width={drawing.width} height={drawing.height} aria-hidden="true">
        <circle cx={x + left} cy={y + top} r="7" />
        <path d={`M${x + left - 12},${y + top}h7m10,0h7M${x + left},${y + top - 12}v7m0,10v7`} />
      </svg>
    </div>
  );
}

/** Fractions of polarization, angle and Faraday spectrum of one place, before the beam. */
function Spectra({ seen }: { readonly seen: PlacePicture }): JSX.Element {
  const { squareM2, I, Q, U } = seen.spectrum;
  const percent = (values: Float64Array): Float64Array => values.map((value, k) => (I[k] > 0 ? (100 * value) / I[k] : NaN));
  const line = (label: string, y: ArrayLike<number>, k: number): Parameters<typeof linePlot>[0]['series'][number] => {
    const style = hypothesisStyle(k, pageTheme);
    return { label, draw: 'line', x: squareM2, y, colour: style.colour, dash: style.dash };
  };
  const size = { width: 300, height: 190, theme: pageTheme };
  const x = { label: 'λ²', unit: 'm^2' };
  const P = Q.map((q, k) => Math.hypot(q, U[k]));
  const angle = Q.map((q, k) => (Math.atan2(U[k], q) * 90) / Math.PI);
  const { depth, P: F } = seen.depths;
  return (
    <div class="spectra">
      <SvgPicture
        drawing={linePlot({ ...size, series: [line('Q/I', percent(Q), 1), line('U/I', percent(U), 2), line('p', percent(P), 0)], x, y: { label: 'polarization', unit: '%', fromZero: true }, legend: true })}
        title="Q, U and polarization against wavelength squared"
      />
      <SvgPicture drawing={linePlot({ ...size, series: [line('χ', angle, 0)], x, y: { label: 'χ', unit: 'deg' } })} title="Polarization angle against wavelength squared" />
      <SvgPicture
        drawing={linePlot({
          ...size,
          series: [{ label: 'F', draw: 'line', x: depth, y: F, colour: hypothesisStyle(0, pageTheme).colour }],
          x: { label: 'Faraday depth', unit: 'rad/m^2' },
          y: { label: '|F|', unit: 'Jy/sr m^2/rad', fromZero: true },
        })}
        title="Faraday spectrum"
      />
    </div>
  );
}
