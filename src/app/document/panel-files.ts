import fontBoldUrl from 'dejavu-fonts-ttf/ttf/DejaVuSans-Bold.ttf?url';
import fontUrl from 'dejavu-fonts-ttf/ttf/DejaVuSans.ttf?url';
import resvgUrl from '@resvg/resvg-wasm/index_bg.wasm?url';
import { pngWithScene, svgWithScene } from '../../figure/carried-scene.ts';
import { mapPanelSvg } from '../../figure/map-panel.ts';
import type { ColourScale } from '../../figure/colour-scale.ts';
import type { MapView } from '../../figure/overview.ts';
import { centrePixel } from '../../figure/panel-map.ts';
import { writeCsv } from '../../files/csv-write.ts';
import type { Provenance } from '../../files/fits-scene.ts';
import { mapFits } from '../../files/sky-fits-write.ts';
import type { CelestialWcs } from '../../sky/wcs-types.ts';
import { save } from './save.ts';

/** Kinds of file that a picture of the page can be taken away as. */
export type PictureKind = 'svg' | 'png' | 'pdf';
export type PanelKind = 'fits' | 'csv' | PictureKind;

/** A map of one column, ready to be taken away. */
export interface PanelToSave {
  /** File name without its ending. */
  readonly name: string;
  readonly view: MapView;
  readonly wcs: CelestialWcs;
  /** Such as `P` or `RM`. */
  readonly quantity: string;
  readonly frequencyHz?: number;
  readonly scale?: ColourScale;
  readonly provenance: Provenance;
}

/** Saves one map: its numbers as FITS or CSV, or the picture, each with its scene inside. */
export async function savePanel(panel: PanelToSave, kind: PanelKind): Promise<void> {
  const { name, view, wcs, quantity, frequencyHz, provenance, scale } = panel;
  if (kind === 'fits') {
    const { map } = view;
    const about = { quantity, unit: map.unit, sky: { nx: map.nx, ny: map.ny, wcs }, values: Float64Array.from(map.values) };
    save(`${name}.fits`, mapFits({ ...about, ...(frequencyHz !== undefined && { frequencyHz }), ...(map.beam && { beam: map.beam }) }, provenance, 64), 'application/fits');
  } else if (kind === 'csv') save(`${name}.csv`, panelCsv(panel), 'text/csv');
  else await savePicture(name, mapPanelSvg(view.map, { ...view, ...(scale && { scale }) }), kind, provenance);
}

/** Saves an SVG as it is, or as PNG or PDF made of it; what those need is fetched when first asked for. */
export async function savePicture(name: string, svg: string, kind: PictureKind, provenance: Provenance): Promise<void> {
  if (kind === 'svg') {
    save(`${name}.svg`, svgWithScene(svg, provenance), 'image/svg+xml');
    return;
  }
  const [regular, bold] = await Promise.all([bytesOf(fontUrl), bytesOf(fontBoldUrl)]);
  if (kind === 'png') {
    const { pngFromSvg } = await import('../../figure/png.ts');
    const png = await pngFromSvg(svg, { wasm: await bytesOf(resvgUrl), fonts: [regular, bold] });
    save(`${name}.png`, pngWithScene(png, provenance), 'image/png');
    return;
  }
  const { pdfFromSvg } = await import('../../figure/pdf.ts');
  save(`${name}.pdf`, await pdfFromSvg(svg, { regular, bold }, name, provenance), 'application/pdf');
}

/** The map's pixels, one a row, with offsets from the galaxy's centre. */
function panelCsv({ view: { map }, quantity, provenance, frequencyHz }: PanelToSave): string {
  const centre = centrePixel(map);
  const pixels = Array.from({ length: map.nx * map.ny }, (_, k) => k);
  return writeCsv(
    [
      { name: 'east', unit: 'arcsec', type: 'float64', values: pixels.map((k) => (centre.column - (k % map.nx)) * map.pixelArcsec) },
      { name: 'north', unit: 'arcsec', type: 'float64', values: pixels.map((k) => (Math.floor(k / map.nx) - centre.row) * map.pixelArcsec) },
      { name: quantity, unit: map.unit, type: 'float64', values: map.values },
    ],
    { ...(frequencyHz !== undefined && { frequency: `${frequencyHz} Hz` }), creator: `gyrelight ${provenance.version}`, seed: provenance.seed, scene: provenance.sceneText },
  );
}

const fetched = new Map<string, Promise<Uint8Array>>();

function bytesOf(url: string): Promise<Uint8Array> {
  const known = fetched.get(url);
  if (known) return known;
  const bytes = fetch(url).then(async (answer) => {
    if (!answer.ok) throw new Error(`${url} could not be read: ${answer.status}`);
    return new Uint8Array(await answer.arrayBuffer());
  });
  fetched.set(url, bytes);
  return bytes;
}
