import { describe, expect, it } from 'vitest';
import { drawContours, doublingLevels } from '../../src/figure/contour-lines.ts';
import { drawBeam, drawRing, drawScaleBar } from '../../src/figure/map-marks.ts';
import { placeMap } from '../../src/figure/map-place.ts';
import { drawOrientation, orientationLines } from '../../src/figure/orientation-lines.ts';
import type { PanelMap } from '../../src/figure/panel-map.ts';
import { overlayInk } from '../../src/figure/theme.ts';
import { needPython, pythonJson } from '../support/tools.ts';

const SIZE = 33;
const map: PanelMap = {
  values: new Float64Array(SIZE * SIZE).fill(1), nx: SIZE, ny: SIZE, pixelArcsec: 4, pixelKpc: 0.2, unit: 'K', title: 'm', kind: 'intensity',
};
const place = placeMap(map, 330, 330);
const ink = overlayInk('intensity');
const DEGREES = 180 / Math.PI;

/** Where astropy's WCS puts a point at a position angle (deg) and distance (arcsec) from the centre: pixels from 0. */
function astropyPixels(angles: readonly number[], distanceArcsec: number): readonly (readonly [number, number])[] {
  const code = `
import json, sys
from astropy.wcs import WCS
from astropy.coordinates import SkyCoord
import astropy.units as u
angles, distance = json.loads(sys.argv[1]), float(sys.argv[2])
w = WCS(naxis=2)
w.wcs.ctype = ['RA---SIN', 'DEC--SIN']; w.wcs.crval = [150, 20]; w.wcs.crpix = [17, 17]
w.wcs.cdelt = [-4 / 3600, 4 / 3600]
centre = SkyCoord(150 * u.deg, 20 * u.deg)
points = [centre.directional_offset_by(a * u.deg, distance * u.arcsec) for a in angles]
print(json.dumps([[float(v) for v in w.world_to_pixel(p)] for p in points]))`;
  return pythonJson(code, [JSON.stringify(angles), String(distanceArcsec)]) as (readonly [number, number])[];
}

/** Ends of the strokes in a path of M x,y L x,y pieces. */
function strokes(svg: string, name: string): readonly (readonly number[])[] {
  const [, d] = new RegExp(`class="${name}" d="([^"]+)"`).exec(svg) ?? ['', ''];
  return d.split('M').slice(1).map((piece) => piece.split(/[L,]/).map(Number));
}

describe('orientation lines', () => {
  const layer = (chiDeg: number) => ({
    chiRad: new Float64Array(SIZE * SIZE).fill(chiDeg / DEGREES), strength: new Float64Array(SIZE * SIZE).fill(2), spacingPixels: SIZE, fullStrength: 2,
  });

  it('point where astropy puts position angle chi + 90 deg', (context) => {
    needPython(context, 'astropy');
    const chis = [0, 20, 45, 90, 133, 170, -64];
    const ends = astropyPixels(chis.map((chi) => chi + 90), 40);
    chis.forEach((chi, k) => {
      const [[x1, y1, x2, y2]] = strokes(drawOrientation(map, layer(chi), place, ink), 'orientation');
      const [column, row] = [ends[k][0] - 16, ends[k][1] - 16];
      // Cross product of the two unit directions; screen y points down. 2 decimals over 330 px: 1e-4;
      // the sky's curvature over 40 arcsec: 1e-4.
      const length = Math.hypot(x2 - x1, y2 - y1);
      const sine = ((x2 - x1) * -row - (y2 - y1) * column) / (length * Math.hypot(column, row));
      expect(Math.abs(sine)).toBeLessThan(3e-4);
      expect(Math.abs(length / 330 - 1)).toBeLessThan(1e-4);
      expect([(x1 + x2) / 2, (y1 + y2) / 2].every((v) => Math.abs(v - 165) < 0.01)).toBe(true);
    });
  });

  it('have no direction: chi and chi + 180 deg average to chi', () => {
    const chiRad = Float64Array.from({ length: SIZE * SIZE }, (_, k) => (k % 2 ? 0.3 : 0.3 - Math.PI));
    const [line] = orientationLines(map, { ...layer(0), chiRad });
    expect(Math.abs(line.fieldAngle - (0.3 + Math.PI / 2))).toBeLessThan(1e-12); // a mean of 1089 equal terms
    expect([line.column, line.row, line.strength]).toEqual([16, 16, 2]);
  });

  it('are longer where the strength is, cancel where angles are crossed, and leave blanks out', () => {
    const count = (strength: (k: number) => number, chi: (k: number) => number, minimum = 0): number =>
      orientationLines(map, {
        chiRad: Float64Array.from({ length: SIZE * SIZE }, (_, k) => chi(k)),
        strength: Float64Array.from({ length: SIZE * SIZE }, (_, k) => strength(k)),
        spacingPixels: 3, minimum,
      }).length;
    expect(count(() => 1, () => 0)).toBe(121);
    expect(count((k) => (k < SIZE * 15 ? NaN : 1), () => 0)).toBe(66);
    expect(count((k) => (k < SIZE * 15 ? 1 : 3), () => 0, 2)).toBe(66);
    expect(count(() => 0, () => 0)).toBe(0);
    const half = { ...layer(0), fullStrength: 4 };
    const [[x1, , x2]] = strokes(drawOrientation(map, half, place, ink), 'orientation');
    expect(Math.abs(Math.abs(x2 - x1) / 165 - 1)).toBeLessThan(1e-4);
  });

  it('have a casing and no arrow heads', () => {
    const svg = drawOrientation(map, layer(10), place, ink);
    expect(svg.match(/<path/g)?.length).toBe(2);
    expect(svg.indexOf('casing')).toBeLessThan(svg.indexOf('orientation'));
    expect(svg).not.toContain('marker');
  });
});

describe('beam, ring and scale bar', () => {
  const angleOf = (svg: string): number => Number(/rotate\((-?[\d.]+)/.exec(svg)?.[1]);

  it('puts the dot of the ring where astropy puts the receding end', (context) => {
    needPython(context, 'astropy');
    const [radiusKpc, angles] = [2, [0, 64, 200, 310]];
    const ends = astropyPixels(angles, (radiusKpc / 0.2) * 4);
    angles.forEach((angle, k) => {
      const svg = drawRing(map, { radiusKpc, inclination: 1, positionAngle: angle / DEGREES }, place, ink);
      const [, x, y] = /<circle cx="([\d.]+)" cy="([\d.]+)"/.exec(svg)!.map(Number);
      const [expectedX, expectedY] = place.pixel(ends[k][0], ends[k][1]);
      expect(Math.hypot(x - expectedX, y - expectedY)).toBeLessThan(0.02); // px: two decimals and the sky's curvature
      const [, rx, ry] = /rx="([\d.]+)" ry="([\d.]+)"/.exec(svg)!.map(Number);
      expect(Math.abs(ry / 100 - 1)).toBeLessThan(1e-4);
      expect(Math.abs(rx / ry - Math.cos(1))).toBeLessThan(1e-3);
    });
  });

  it('turns beam and ring counter-clockwise, which is through east', () => {
    expect(angleOf(drawBeam({ majorArcsec: 20, minorArcsec: 10, angle: 30 / DEGREES }, place, ink))).toBe(-30);
    const svg = drawBeam({ majorArcsec: 20, minorArcsec: 10, angle: 0 }, place, ink);
    expect(svg).toContain('rx="12.5" ry="25"'); // 2.5 px an arcsec, half the FWHM
  });

  it('draws a round length that is true', () => {
    const svg = drawScaleBar(map, place, ink);
    expect(svg).toContain('>1 kpc<');
    const [[x1, , x2]] = strokes(svg, 'scale-bar');
    expect(Math.abs((x2 - x1) / 50 - 1)).toBeLessThan(1e-3); // 50 px a kpc
    expect(drawScaleBar({ ...map, pixelKpc: 0.004 }, place, ink)).toContain('>20 pc<');
    expect(drawScaleBar({ ...map, pixelKpc: undefined }, place, ink)).toBe('');
  });
});

describe('contours', () => {
  const cone = Float64Array.from({ length: SIZE * SIZE }, (_, k) => 10 - Math.hypot((k % SIZE) - 16, Math.floor(k / SIZE) - 16 - 3));
  const points = (svg: string): number[][] => [...(/class="contour" d="([^"]+)"/.exec(svg)?.[1] ?? '').matchAll(/([\d.-]+),([\d.-]+)/g)].map((m) => [Number(m[1]), Number(m[2])]);

  it('lie where the array has their level, north up', () => {
    const found = points(drawContours(map, { values: cone, levels: [4] }, place, ink));
    expect(found.length).toBeGreaterThan(30);
    const [x0, y0] = place.pixel(16, 19);
    expect(y0).toBeLessThan(165);
    // A circle of 6 pixels; linear interpolation of a cone between pixels errs by 1/(8 r) pixel.
    for (const [x, y] of found) expect(Math.abs(Math.hypot(x - x0, y - y0) / 10 - 6)).toBeLessThan(0.03);
  });

  it('do not run along blanks or the edge of the map', () => {
    const half = cone.map((value, k) => (k % SIZE < 16 ? NaN : value));
    for (const [x] of points(drawContours(map, { values: half, levels: [4, -5] }, place, ink))) {
      expect(x).toBeGreaterThan(165);
      expect(x).toBeLessThan(330);
    }
    expect(drawContours(map, { values: map.values, levels: [0.5] }, place, ink)).toBe('');
  });

  it('climb by doubling', () => {
    expect(doublingLevels(3, 20)).toEqual([3, 6, 12]);
    expect(doublingLevels(0, 20)).toEqual([]);
  });
});
