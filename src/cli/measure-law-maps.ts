import type { Provenance } from '../files/fits-scene.ts';
import { mapFits } from '../files/sky-fits-write.ts';
import { lawMaps, type LawMapWatch } from '../infer/law-maps.ts';
import { laws } from '../measure/laws/index.ts';
import type { Layout } from '../measure/layout.ts';
import { pixelSpectra, type ThermalShare } from '../measure/region-spectrum.ts';
import type { DepthMaps } from '../sky/depth-maps.ts';
import { inDegrees } from '../sky/derived.ts';
import type { MapData } from './measure-input.ts';
import type { OutputFolder } from './output-folder.ts';

/** Fits the laws to every pixel of the layout that shows a depth, and adds maps of the best law and its parameters. */
export async function addLawMaps(folder: OutputFolder, data: MapData, layout: Layout, maps: DepthMaps, spectralIndex: number, thermal: ThermalShare | undefined, provenance: Provenance, watch: LawMapWatch): Promise<void> {
  const { nx, ny } = data.frame;
  const spectrumOf = pixelSpectra(data.bands, { nx, ny }, { spectralIndex }, thermal);
  const pixels = [...maps.depth.keys()].filter((k) => Number.isFinite(maps.depth[k]) && layout.regionOf[k] >= 0 && spectrumOf(k).q.every(Number.isFinite));
  const found = await lawMaps(laws, pixels, nx * ny, spectrumOf, watch);
  const shared = { sky: data.frame, ...(data.frame.beam && { beam: data.frame.beam }) };
  const list = laws.map((law, k) => `${k}: ${law.name}`).join('; ');
  const add = (name: string, quantity: string, unit: string, values: Float64Array, comments: readonly string[]): void =>
    folder.add(`laws/${name}.fits`, mapFits({ ...shared, quantity, unit, values, comments }, provenance, 32));
  add('best', 'best law', '', found.best, [`The law of lowest BIC: ${list}.`]);
  add('reduced-chi2', 'chi2 per degree of freedom', '', found.reducedChi2, ['Of the best law.']);
  add('lead', 'BIC of the next law less that of the best', '', found.lead, ['Below 2 the data cannot tell the two apart.']);
  const unitOf = new Map(laws.flatMap((law) => law.parameters.map(({ name, unit }) => [name, unit] as const)));
  for (const [name, values] of Object.entries(found.values)) {
    if (!values.some(Number.isFinite)) continue;
    const unit = unitOf.get(name) ?? '';
    const shown = (plane: Float64Array): Float64Array => (unit === 'rad' ? inDegrees(plane) : plane);
    add(name, name, unit === 'rad' ? 'deg' : unit, shown(values), [`Parameter ${name} of the best law where it has one.`]);
    add(`${name}-error`, `${name} error`, unit === 'rad' ? 'deg' : unit, shown(found.errors[name]), ['One standard deviation.']);
  }
}
