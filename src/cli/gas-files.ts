import type { Provenance } from '../files/fits-scene.ts';
import { mapFits } from '../files/sky-fits-write.ts';
import type { Scene } from '../scene/types.ts';
import type { GasMaps } from '../sky/gas-maps.ts';
import type { SkyGrid } from '../sky/types.ts';
import type { OutputFolder } from './output-folder.ts';

/** Adds the maps of dust and of the density-weighted B_∥ that a scene asks for. */
export function addGasFiles(folder: OutputFolder, scene: Scene, { dust, zeeman }: GasMaps, sky: SkyGrid, provenance: Provenance): void {
  const { beam } = scene.observation;
  const { bits } = scene.numerics;
  const shared = { sky, ...(beam && { beam }) };
  if (zeeman) {
    const comments = ['Field along the line of sight, weighted by density, positive towards the observer.'];
    folder.add('zeeman.fits', mapFits({ quantity: 'zeeman', unit: 'uG', values: zeeman, comments, ...shared }, provenance, bits));
  }
  if (!dust || !scene.dust) return;
  for (const stokes of ['I', 'Q', 'U'] as const) {
    const comments = ['Thermal emission of dust, optically thin; no noise.'];
    folder.add(`dust-${stokes}.fits`, mapFits({ quantity: stokes, unit: dust.unit, values: dust[stokes], frequencyHz: scene.dust.frequencyHz, comments, ...shared }, provenance, bits));
  }
}
