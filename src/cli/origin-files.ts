import { mapFits } from '../files/sky-fits-write.ts';
import type { Provenance } from '../files/fits-scene.ts';
import type { MapSky } from '../files/sky-header.ts';
import { makeOriginMaps, type OriginMaps } from '../measure/origin-map.ts';
import type { SpectralPoint } from '../ray/integrand.ts';
import { walkOrigins, type OriginPieces } from '../ray/origin.ts';
import type { RayBundle } from '../ray/types.ts';
import type { Scene } from '../scene/types.ts';
import type { SkyGrid } from '../sky/types.ts';
import { bandFileName, type OutputFolder } from './output-folder.ts';

export interface OriginWatch {
  readonly onProgress: (done: number, total: number) => void;
  readonly pause: () => Promise<void>;
  readonly signal: AbortSignal;
}

const raysAtOnce = 1024;

/** Maps of the layers that rays show at some frequencies. Rays off the sky are blank; `onRay` sees the pieces of the others. */
export async function originMaps(scene: Scene, { northKpc, eastKpc }: RayBundle, spectrum: readonly SpectralPoint[], watch: OriginWatch, onRay?: (ray: number, pieces: OriginPieces) => void): Promise<OriginMaps> {
  const { maps, take } = makeOriginMaps(scene.galaxy.inclination, northKpc.length, spectrum.length);
  const wanted = Array.from(northKpc.keys()).filter((ray) => Number.isFinite(northKpc[ray] + eastKpc[ray]));
  for (let from = 0; from < wanted.length; from += raysAtOnce) {
    watch.signal.throwIfAborted();
    const some = wanted.slice(from, from + raysAtOnce);
    walkOrigins(scene, { northKpc: Float64Array.from(some, (ray) => northKpc[ray]), eastKpc: Float64Array.from(some, (ray) => eastKpc[ray]) }, spectrum, (k, pieces) => {
      take(some[k], pieces);
      onRay?.(some[k], pieces);
    });
    watch.onProgress(from + some.length, wanted.length);
    await watch.pause();
  }
  return maps;
}

/** Adds the maps of a band's layer, planes [frequency * pixels + pixel] at `frequenciesHz`, the first plane of it at `first`. */
export function addOriginFiles(folder: OutputFolder, band: string, sky: SkyGrid | MapSky, frequenciesHz: readonly number[], first: number, maps: OriginMaps, provenance: Provenance, bits: 32 | 64): void {
  const pixels = sky.nx * sky.ny;
  const add = (name: string, unit: string, values: Float64Array, comment: string): void => {
    const planes = values.slice(first * pixels, (first + frequenciesHz.length) * pixels);
    const about = { quantity: name, unit, sky, band, values: planes, comments: [comment, 'Of the polarized emission along each line of sight; no beam, no foreground.'] };
    const channels = frequenciesHz.map((frequencyHz) => ({ frequencyHz, widthHz: 0 }));
    const single = channels.length === 1 ? { frequencyHz: channels[0].frequencyHz } : { channels };
    folder.add(`${name}-${bandFileName(band)}.fits`, mapFits({ ...about, ...single }, provenance, bits));
  };
  add('originMedian', 'kpc', maps.medianKpc, 'Height below which half of the net share seen arises, positive along the spin.');
  add('originLow', 'kpc', maps.lowKpc, 'Height below which 16 % of the net share seen arises.');
  add('originHigh', 'kpc', maps.highKpc, 'Height below which 84 % of the net share seen arises.');
  add('nearShare', '', maps.nearShare, 'Part of the net share from before the plane of the disc; the rest is the far side.');
  add('cancelledShare', '', maps.cancelledShare, 'Part of all shares, by size, that others along the line of sight cancel.');
}
