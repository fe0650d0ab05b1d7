import { describe, expect, it } from 'vitest';
import { colourBar } from '../../src/figure/colour-bar.ts';
import { colourLevel, sharedColourScale } from '../../src/figure/colour-scale.ts';
import { mapFrame } from '../../src/figure/map-frame.ts';
import { mapPanelSvg } from '../../src/figure/map-panel.ts';
import type { PanelMap } from '../../src/figure/panel-map.ts';
import { darkTheme, lightTheme } from '../../src/figure/theme.ts';
import { sampleMaps } from './sample.ts';
import { decodePng, embeddedPng } from './png-decode.ts';
import { expectWellFormed } from './well-formed.ts';

const small = (values: number[], kind: PanelMap['kind'] = 'intensity', unit = 'Jy/beam'): PanelMap => ({
  values, nx: values.length, ny: 1, pixelArcsec: 1, unit, kind, title: 'small',
});

describe('colour scales', () => {
  it('give the ends and the middle their colours, and blanks none', () => {
    const scale = sharedColourScale([small([-4, 2, NaN], 'signed')]);
    expect(scale.limits).toEqual([-4, 4]);
    expect([-9, -4, 0, 4, 9, NaN, Infinity].map((value) => colourLevel(scale, value))).toEqual([1, 1, 128, 255, 255, 0, 0]);
  });

  it('are shared by the maps of a row, from zero for intensities', () => {
    const scale = sharedColourScale([small([0.1e-6, 2e-6]), small([5e-6, 1e-6])]);
    expect(scale.limits).toEqual([0, 5e-6]);
    expect(scale.shownUnit).toBe('µJy/beam');
    expect(sharedColourScale([small([90, 100])]).limits).toEqual([90, 100]);
  });

  it('come round for angles, in degrees and radians', () => {
    const degrees = sharedColourScale([small([0], 'angle', 'deg')]);
    const radians = sharedColourScale([small([0], 'angle', 'rad')]);
    for (const angle of [0, 10, 90, 179.9]) {
      expect(colourLevel(degrees, angle - 180)).toBe(colourLevel(degrees, angle));
      expect(colourLevel(radians, (angle * Math.PI) / 180)).toBe(colourLevel(degrees, angle));
    }
  });

  it('are not stretched by a few wild pixels of a signed map, and say so', () => {
    const values = Array.from({ length: 1000 }, (_, k) => Math.sin(k) * 10);
    values[500] = 4000;
    const scale = sharedColourScale([small(values, 'signed', 'rad m^-2')]);
    expect(scale.limits[1]).toBeLessThan(10.001);
    expect(scale.beyond).toEqual([false, true]);
    expect(colourBar(scale, '', 100, true, lightTheme).body.match(/class="beyond"/g)?.length).toBe(1);
  });

  it('stand blank, constant and zero maps', () => {
    for (const values of [[NaN, NaN], [0, 0], [-1, -1]]) {
      for (const kind of ['intensity', 'signed'] as const) {
        const { limits } = sharedColourScale([small(values, kind)]);
        expect(limits[1] - limits[0]).toBeGreaterThan(0);
      }
    }
  });

  it('refuse maps that cannot be compared', () => {
    expect(() => sharedColourScale([small([1]), small([1], 'intensity', 'K')])).toThrow(/cannot share a colour scale/);
    expect(() => sharedColourScale([])).toThrow(RangeError);
  });
});

describe('the panel of a map', () => {
  const { p, rm, orientation } = sampleMaps();

  it('is well formed with every layer, in both themes, whatever the title', (context) => {
    for (const theme of [lightTheme, darkTheme]) {
      const svg = mapPanelSvg({ ...p, title: '</title><script>"&' }, {
        orientation, theme, axes: 'kpc',
        contours: { values: p.values, levels: [5e-5, 1e-4] },
        rings: [{ radiusKpc: 6, inclination: 0.66, positionAngle: 1.1 }],
      });
      expectWellFormed(context, svg);
      expect(svg).not.toMatch(/NaN|Infinity|undefined|<script/);
      for (const part of ['hatch', 'contour', 'orientation', 'ring', 'beam', 'scale-bar']) expect(svg).toContain(`class="${part}"`);
    }
  });

  it('has the same bytes on a rerun, from another copy of the data', () => {
    expect(mapPanelSvg(sampleMaps().p, { orientation })).toBe(mapPanelSvg(p, { orientation }));
  });

  it('hatches blanks, and nothing where there are none', () => {
    expect(mapPanelSvg(rm)).toContain('class="hatch"');
    const full = { ...rm, values: Array.from(rm.values, (value) => (Number.isFinite(value) ? value : 0)) };
    expect(mapPanelSvg(full)).not.toContain('class="hatch"');
  });

  it('embeds one image pixel a map pixel: first row at the bottom, first column (east) at the left, blank transparent', (context) => {
    const map: PanelMap = { ...small([1, 2, 3, NaN, 5, 6]), nx: 3, ny: 2 };
    const decoded = decodePng(context, embeddedPng(mapPanelSvg(map)));
    const scale = sharedColourScale([map]);
    expect(decoded.rows).toEqual([[NaN, 5, 6], [1, 2, 3]].map((row) => row.map((value) => colourLevel(scale, value))));
    expect(decoded.rows[0][0]).toBe(0);
    expect(decoded.transparency).toEqual([0]);
  });

  it('counts offsets from the reference pixel, east to the left', () => {
    const map: PanelMap = { ...small([1, 2, 3, 4, 5, 6, 7, 8, 9]), ny: 1, pixelArcsec: 10 };
    const frame = (reference?: number) =>
      mapFrame({ ...map, crpixX: reference }, { scale: sharedColourScale([map]), boxWidth: 180, boxHeight: 180, axes: 'arcsec', theme: lightTheme }).body;
    const tickAt = (body: string, label: string): number => Number(new RegExp(`<text x="([\\d.]+)" y="34"[^>]*>${label}<`).exec(body)?.[1]);
    expect(tickAt(frame(), '0')).toBe(90);
    expect(tickAt(frame(), '20')).toBe(50);
    expect(tickAt(frame(), '−20')).toBe(130);
    expect(tickAt(frame(1), '0')).toBe(10);
  });

  it('refuses an array that is not the map’s size and kpc axes without a distance', () => {
    expect(() => mapPanelSvg({ ...p, nx: 5 })).toThrow(/9409 values for 5 x 97 pixels/);
    expect(() => mapPanelSvg({ ...p, pixelKpc: undefined }, { axes: 'kpc' })).toThrow(/no pixel size in kpc/);
  });
});
