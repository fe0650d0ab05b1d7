import type { Provenance } from '../files/fits-scene.ts';
import { writeCsv } from '../files/csv-write.ts';
import type { Layout } from '../measure/layout.ts';
import { makeOriginProfiles, type OriginLayer } from '../measure/origin-profile.ts';
import type { Scene } from '../scene/types.ts';
import { offsetsKpc } from '../sky/grid.ts';
import type { MapData } from './measure-input.ts';
import { addOriginFiles, originMaps, type OriginWatch } from './origin-files.ts';
import type { OutputFolder } from './output-folder.ts';

/** Adds the layers of a scene that every band of the maps sees at its centre: maps, and `origin.csv` by region. */
export async function addOrigins(folder: OutputFolder, scene: Scene, data: MapData, layout: Layout, watch: OriginWatch, meta: Readonly<Record<string, string | number>>, provenance: Provenance): Promise<void> {
  const { wcs, nx, ny } = data.frame;
  const frequenciesHz = data.bands.map(({ channels }) => (channels[0].frequencyHz + channels[channels.length - 1].frequencyHz) / 2);
  const spectrum = frequenciesHz.map((frequencyHz) => ({ frequencyHz, centreHz: frequencyHz }));
  const { take, layers } = makeOriginProfiles(scene.galaxy, layout.regions.length, spectrum.length);
  const bundle = offsetsKpc(wcs, nx, ny, scene.galaxy.distanceKpc, scene.galaxy.centre);
  const maps = await originMaps(scene, bundle, spectrum, watch, (ray, pieces) => {
    if (layout.regionOf[ray] >= 0) take(layout.regionOf[ray], pieces);
  });
  data.bands.forEach((band, k) => addOriginFiles(folder, band.name, data.frame, [frequenciesHz[k]], k, maps, provenance, 32));
  folder.add('origin.csv', originCsv(data, layout, frequenciesHz, layers(), meta));
}

/** One row a band and region. */
function originCsv(data: MapData, layout: Layout, frequenciesHz: readonly number[], layers: readonly (readonly OriginLayer[])[], meta: Readonly<Record<string, string | number>>): string {
  const rows = data.bands.flatMap((band, f) => layout.regions.map((region, k) => ({ band, region, frequencyHz: frequenciesHz[f], layer: layers[k][f] })));
  const column = (pick: (row: (typeof rows)[number]) => number): number[] => rows.map(pick);
  const degrees = 180 / Math.PI;
  return writeCsv(
    [
      { name: 'band', type: 'string', values: rows.map(({ band }) => band.name) },
      { name: 'frequency', unit: 'Hz', type: 'float64', values: column(({ frequencyHz }) => frequencyHz) },
      { name: 'inner', unit: 'kpc', type: 'float64', values: column(({ region }) => region.innerKpc) },
      { name: 'outer', unit: 'kpc', type: 'float64', values: column(({ region }) => region.outerKpc) },
      { name: 'azimuth', unit: 'deg', type: 'float64', values: column(({ region }) => region.azimuth * degrees) },
      { name: 'across', unit: 'kpc', type: 'float64', values: column(({ region }) => region.alongKpc) },
      { name: 'median', unit: 'kpc', type: 'float64', values: column(({ layer }) => layer.medianKpc), description: 'height below which half of the net share seen arises; positive along the spin; no beam' },
      { name: 'low', unit: 'kpc', type: 'float64', values: column(({ layer }) => layer.lowKpc), description: '16 % point' },
      { name: 'high', unit: 'kpc', type: 'float64', values: column(({ layer }) => layer.highKpc), description: '84 % point' },
      { name: 'mean', unit: 'kpc', type: 'float64', values: column(({ layer }) => layer.meanKpc), description: 'mean height, negative shares counted' },
      { name: 'near', type: 'float64', values: column(({ layer }) => layer.nearShare), description: 'share from before the plane of the disc' },
      { name: 'far', type: 'float64', values: column(({ layer }) => layer.farShare), description: 'share from behind it' },
      { name: 'cancelled', type: 'float64', values: column(({ layer }) => layer.cancelledShare), description: 'part of all shares that others cancel' },
      { name: 'seen_depth', unit: 'rad/m2', type: 'float64', values: column(({ layer }) => layer.seenDepth), description: 'mean Faraday depth of the light seen, without the foreground' },
      { name: 'whole_depth', unit: 'rad/m2', type: 'float64', values: column(({ layer }) => layer.wholeDepth), description: 'Faraday depth through the whole galaxy, mean of the rays, without the foreground' },
      { name: 'rays', type: 'int64', values: column(({ layer }) => layer.rays), description: 'pixels that count' },
    ],
    meta,
  );
}
