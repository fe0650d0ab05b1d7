import { readFileSync } from 'node:fs';
import { fileURLToPath } from 'node:url';
import { describe, expect, it } from 'vitest';
import { colourAt } from '../../src/figure/palette.ts';
import { mapFrame } from '../../src/figure/map-frame.ts';
import { sharedColourScale } from '../../src/figure/colour-scale.ts';
import type { PanelMap } from '../../src/figure/panel-map.ts';
import { indexedPng, pngDataUri } from '../../src/figure/png-image.ts';
import { pngFromSvg } from '../../src/figure/png.ts';
import type { PngTools } from '../../src/figure/png.ts';
import { svgDocument, textElement } from '../../src/figure/svg.ts';
import { lightTheme } from '../../src/figure/theme.ts';
import { decodePng, embeddedPng } from './png-decode.ts';

const packageFile = (path: string): Uint8Array => readFileSync(fileURLToPath(new URL(`../../node_modules/${path}`, import.meta.url)));
const tools: PngTools = {
  wasm: packageFile('@resvg/resvg-wasm/index_bg.wasm'),
  fonts: [packageFile('dejavu-fonts-ttf/ttf/DejaVuSans.ttf')],
};

describe('the encoder of images', () => {
  it('gives what zlib decodes to the same pixels and palette', (context) => {
    const [width, height] = [37, 23];
    const pixels = Uint8Array.from({ length: width * height }, (_, k) => (k * 73) & 255);
    const palette = Uint8Array.from({ length: 768 }, (_, k) => (k * 31) & 255);
    const png = indexedPng(pixels, width, height, palette);
    const decoded = decodePng(context, png);
    expect([decoded.width, decoded.height, decoded.size]).toEqual([width, height, 1]);
    expect(decoded.rows.flat()).toEqual([...pixels]);
    expect(decoded.palette).toEqual([...palette]);
    expect(decoded.transparency).toEqual([0]);
    expect(embeddedPng(`href="${pngDataUri(png)}"`)).toEqual(png);
  });

  it('refuses a wrong number of pixels', () => {
    expect(() => indexedPng(new Uint8Array(5), 2, 3, new Uint8Array(768))).toThrow(/5 pixels given for an image of 2 x 3/);
  });
});

describe('PNG from SVG', () => {
  const map: PanelMap = { values: [1, 2, 3, 4], nx: 2, ny: 2, pixelArcsec: 1, unit: 'K', title: 't', kind: 'signed' };
  const scale = sharedColourScale([map], [-4, 4]);
  const svg = svgDocument(mapFrame(map, { scale, boxWidth: 40, boxHeight: 40, axes: 'none', theme: lightTheme }), { title: 't', ink: '#000', paper: '#fff' });

  it('keeps map pixels sharp and each in its place: row 0 south, column 0 east at the left', async (context) => {
    const decoded = decodePng(context, await pngFromSvg(svg, tools));
    expect([decoded.width, decoded.height]).toEqual([80, 80]);
    const at = (x: number, y: number): readonly number[] => decoded.rows[y].slice(4 * x, 4 * x + 3);
    const colour = (value: number): readonly number[] => colourAt('signed', Math.round(254 * ((value + 4) / 8)) / 254);
    // Just inside each quadrant, beside the middle, where smoothing would mix neighbours.
    for (const [x, y, value] of [[38, 38, 3], [42, 38, 4], [38, 42, 1], [42, 42, 2], [6, 6, 3], [74, 74, 2]]) {
      expect(at(x, y)).toEqual(colour(value));
    }
  });

  it('sets text and gives the same bytes again', async (context) => {
    const words = svgDocument({ width: 60, height: 20, body: textElement(5, 15, 'χ² µ ⁻²') }, { title: 'words', ink: '#000', paper: '#fff' });
    const [first, second] = [await pngFromSvg(words, tools, 1), await pngFromSvg(words, tools, 1)];
    expect(first).toEqual(second);
    const dark = decodePng(context, first).rows.flat().filter((value, k) => k % 4 === 0 && value < 128).length;
    expect(dark).toBeGreaterThan(30); // strokes of seven letters; none where the font was not found
  });

  it('refuses broken SVG', async () => {
    await expect(pngFromSvg('<svg><g></svg>', tools)).rejects.toThrow();
  });
});
