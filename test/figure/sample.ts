import type { OrientationLayer } from '../../src/figure/orientation-lines.ts';
import type { PanelMap } from '../../src/figure/panel-map.ts';

const SIZE = 97;

/** An invented inclined ring of emission with its field orientation and RM, blank outside a circle. */
export function sampleMaps(fade = 0.6): { readonly p: PanelMap; readonly rm: PanelMap; readonly orientation: OrientationLayer } {
  const [inclination, positionAngle] = [0.66, 1.1];
  const p = new Float64Array(SIZE * SIZE);
  const rm = new Float64Array(SIZE * SIZE);
  const chi = new Float64Array(SIZE * SIZE);
  for (let row = 0; row < SIZE; row++) {
    for (let column = 0; column < SIZE; column++) {
      const k = row * SIZE + column;
      const [north, east] = [(row - 48) * 0.25, (48 - column) * 0.25];
      const x = north * Math.cos(positionAngle) + east * Math.sin(positionAngle);
      const y = (-north * Math.sin(positionAngle) + east * Math.cos(positionAngle)) / Math.cos(inclination);
      const [r, phi] = [Math.hypot(x, y), Math.atan2(y, x)];
      p[k] = 2.4e-4 * Math.exp(-(((r - 6) / 3) ** 2)) * (1 - fade * Math.cos(phi)) * (1 + 0.2 * Math.cos(2 * phi));
      rm[k] = 60 * Math.cos(phi - 0.4) * Math.exp(-r / 9) + 8;
      const field = phi + Math.PI / 2 - 0.35;
      const [fx, fy] = [Math.cos(field), Math.sin(field) * Math.cos(inclination)];
      const [fn, fe] = [fx * Math.cos(positionAngle) - fy * Math.sin(positionAngle), fx * Math.sin(positionAngle) + fy * Math.cos(positionAngle)];
      chi[k] = Math.atan2(fe, fn) - Math.PI / 2;
      if (Math.hypot(north, east) > 11.8) p[k] = rm[k] = NaN;
      if (!(p[k] > 1.2e-5)) rm[k] = NaN;
    }
  }
  const common = { nx: SIZE, ny: SIZE, pixelArcsec: 5, pixelKpc: 0.25, beam: { majorArcsec: 40, minorArcsec: 28, angle: 0.5 } };
  return {
    p: { ...common, values: p, unit: 'Jy/beam', title: 'Polarized intensity, 1.4 GHz', kind: 'intensity' },
    rm: { ...common, values: rm, unit: 'rad m^-2', title: 'Rotation measure', kind: 'signed' },
    orientation: { chiRad: chi, strength: p, spacingPixels: 6, minimum: 1e-5 },
  };
}

/** Sectors of 20 deg with a model curve of amplitude `fade`. */
export function sampleSectors(fade: number, shift = 0): { readonly azimuthDeg: number[]; readonly value: number[]; readonly error: number[] } {
  const azimuthDeg = Array.from({ length: 18 }, (_, k) => k * 20);
  return {
    azimuthDeg,
    value: azimuthDeg.map((azimuth, k) => 1.6e-4 * (1 - fade * Math.cos((azimuth * Math.PI) / 180)) + shift * 1e-6 * ((k * 7) % 5 - 2)),
    error: azimuthDeg.map(() => 1.1e-5),
  };
}
