import type { MapFrame } from '../measure/disc.ts';
import type { RingProfile } from '../measure/ring-profile.ts';
import type { CentreMaps } from '../sky/band-centre.ts';
import type { RotationMeasureMaps } from '../sky/rotation-measure-map.ts';
import { pixelAreaSr } from '../sky/wcs.ts';
import { arcsec } from '../sky/grid.ts';
import type { AzimuthValues } from './azimuth-profile.ts';
import type { Ring as DrawnRing } from './map-marks.ts';
import type { MapView } from './overview.ts';
import type { PanelMap } from './panel-map.ts';
import { quantityText } from './number-text.ts';

/** What a map panel needs to know of the sky it shows. */
export interface ViewFrame {
  readonly frame: MapFrame;
  readonly distanceKpc: number;
  readonly rings?: readonly DrawnRing[];
}

const degree = Math.PI / 180;
/** Orientation lines are drawn where P is above this many times its noise, and this share of the largest. */
const leastSignal = 4;
const leastShare = 0.05;

/** Polarized intensity (without noise bias) of a band, with lines of field orientation. */
export function polarizationView(maps: CentreMaps, unit: string, view: ViewFrame, title: string): MapView {
  const largest = maps.debiasedP.reduce((most, value) => (value > most ? value : most), 0);
  return {
    map: panel(maps.debiasedP, unit, 'intensity', title, view),
    orientation: { chiRad: maps.chi, strength: maps.debiasedP, minimum: Math.max(leastSignal * maps.noise, leastShare * largest) },
    rings: view.rings,
  };
}

/** Rotation measure. */
export function rotationMeasureView(rm: Pick<RotationMeasureMaps, 'rm'>, view: ViewFrame, title: string): MapView {
  return { map: panel(rm.rm, 'rad/m^2', 'signed', title, view), rings: view.rings };
}

/** P round a ring, as points or a curve of an azimuth profile. */
export function profileOfP({ sectors }: RingProfile, label: string): AzimuthValues {
  return {
    label,
    azimuthDeg: sectors.map((sector) => sector.azimuth / degree),
    value: sectors.map((sector) => sector.P.value),
    error: sectors.map((sector) => sector.P.error),
  };
}

/** RM round a ring. */
export function profileOfRm({ sectors }: RingProfile, label: string): AzimuthValues {
  return {
    label,
    azimuthDeg: sectors.map((sector) => sector.azimuth / degree),
    value: sectors.map((sector) => sector.rm?.value ?? NaN),
    error: sectors.map((sector) => sector.rm?.error ?? 0),
  };
}

/** `1.40 GHz`. */
export function frequencyLabel(frequencyHz: number): string {
  return frequencyHz >= 1e9 ? quantityText(frequencyHz / 1e9, 'GHz', 3) : quantityText(frequencyHz / 1e6, 'MHz', 3);
}

function panel(values: Float64Array, unit: string, kind: PanelMap['kind'], title: string, { frame, distanceKpc }: ViewFrame): PanelMap {
  const pixelRad = Math.sqrt(pixelAreaSr(frame.wcs));
  return {
    values,
    nx: frame.nx,
    ny: frame.ny,
    pixelArcsec: pixelRad / arcsec,
    pixelKpc: pixelRad * distanceKpc,
    unit,
    title,
    kind,
    ...(frame.beam && { beam: frame.beam }),
    crpixX: frame.wcs.crpixX,
    crpixY: frame.wcs.crpixY,
  };
}
