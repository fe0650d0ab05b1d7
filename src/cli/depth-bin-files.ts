import { join } from 'node:path';
import { streamCube } from '../files/cube-stream.ts';
import type { Provenance } from '../files/fits-scene.ts';
import { depthCubeUnits } from '../files/sky-fits-write.ts';
import { makeDepthBinner } from '../ray/depth-bins.ts';
import type { Band, Scene } from '../scene/types.ts';
import { gridOffsetsKpc } from '../sky/grid.ts';
import type { SeenSky } from '../sky/observe.ts';
import { InputError } from '../units/input-error.ts';
import { flagQuantity } from './measure-flags.ts';
import type { OriginWatch } from './origin-files.ts';
import { bandFileName, type OutputFolder } from './output-folder.ts';

const raysAtOnce = 1024;

/** The width of bins of Faraday depth that a flag gives, rad m^-2. Throws InputError where it is none. */
export function depthBinsFlag(text: string): number {
  const width = flagQuantity('depth-bins', text, 'rad/m^2');
  if (!(width > 0 && Number.isFinite(width))) throw new InputError('expected a width above 0, such as "5 rad/m^2"', { flag: `--depth-bins ${text}` });
  return width;
}

/** Writes the true Faraday spectra of a map's pixels, Q and U of each band at its reference frequency, foreground's depth included. */
export async function addDepthBins(folder: OutputFolder, scene: Scene, { grid, foreground }: Pick<SeenSky, 'grid' | 'foreground'>, width: number, provenance: Provenance, watch: OriginWatch): Promise<void> {
  const { northKpc, eastKpc } = gridOffsetsKpc(grid);
  const pixels = northKpc.length;
  const { bands } = scene.observation;
  const frequenciesHz = bands.map(referenceFrequency);
  const spectrum = frequenciesHz.map((frequencyHz) => ({ frequencyHz, centreHz: frequencyHz }));
  const binner = makeDepthBinner(scene, spectrum, pixels, width);
  const onSky = Array.from(northKpc.keys()).filter((pixel) => Number.isFinite(northKpc[pixel] + eastKpc[pixel]));
  for (let from = 0; from < onSky.length; from += raysAtOnce) {
    watch.signal.throwIfAborted();
    const some = onSky.slice(from, from + raysAtOnce);
    const at = (values: Float64Array): Float64Array => Float64Array.from(some, (pixel) => values[pixel]);
    binner.add({ northKpc: at(northKpc), eastKpc: at(eastKpc) }, some, typeof foreground === 'number' ? new Float64Array(some.length).fill(foreground) : at(foreground));
    watch.onProgress(from + some.length, onSky.length);
    await watch.pause();
  }
  const { firstDepth, bins } = binner.done();
  if (bins.length === 0) throw new InputError('nothing of the galaxy emits polarized light along any ray: there is no Faraday spectrum', { flag: '--depth-bins' });
  const blank = Array.from(northKpc.keys()).filter((pixel) => !Number.isFinite(northKpc[pixel] + eastKpc[pixel]));
  bands.forEach((band, f) => {
    for (const stokes of ['Q', 'U'] as const) {
      const comments = [
        `True Faraday spectrum at ${frequenciesHz[f] / 1e9} GHz: emission by the depth it lies at, foreground included.`,
        'Before rotation, depolarization, absorption and beam: P(lambda^2) is its transform, sum F exp(2 i phi lambda^2) CDELT3.',
        'Bins touch; each value is the mean density of its bin.',
      ];
      const about = { quantity: `${stokes} of F`, unit: 'Jy sr-1 rad-1 m2', sky: grid, band: band.name, comments, firstDepthRadM2: firstDepth, depthStepRadM2: width, depthCount: bins.length, referenceLambdaM2: 0 };
      const name = `trueFaradaySpectrum-${stokes}-${bandFileName(band.name)}.fits`;
      const stream = streamCube(join(folder.path, name), depthCubeUnits(about, provenance, scene.numerics.bits));
      folder.addBegun(name, stream);
      bins.forEach((bin, k) => {
        const plane = bin ? bin[stokes].slice(f * pixels, (f + 1) * pixels).map((value) => value / width) : new Float64Array(pixels);
        for (const pixel of blank) plane[pixel] = NaN;
        stream.writeLayers(k, plane);
      });
    }
  });
}

/** The frequency that a band's spectrum holds at: its centre, else that of its middle channel. */
function referenceFrequency({ centreHz, channels }: Band): number {
  return centreHz ?? channels[Math.floor(channels.length / 2)].frequencyHz;
}
