import { join } from 'node:path';
import { streamDepthCube, type DepthCubeStream } from '../files/depth-cube-stream.ts';
import type { Provenance } from '../files/fits-scene.ts';
import { mapFits, type DepthCube } from '../files/sky-fits-write.ts';
import type { DiscOrientation } from '../measure/disc.ts';
import { joinedRows } from '../sky/cube-source.ts';
import { depthMaps, type DepthMapOptions, type DepthMaps } from '../sky/depth-maps.ts';
import type { DepthPlan } from '../sky/depth-spectrum.ts';
import { inDegrees } from '../sky/derived.ts';
import type { MapData } from './measure-input.ts';
import { fittedRotation, planesOfChannels } from './measure-run.ts';
import type { OutputFolder } from './output-folder.ts';

const cubeName = 'faraday-spectrum.fits';

/** The file of the spectra's absolute values, begun beside its place; it is written as rows are done. */
export function beginDepthCube({ frame, unit }: MapData, plan: DepthPlan, folder: OutputFolder, provenance: Provenance): DepthCubeStream {
  const about: Omit<DepthCube, 'values'> = {
    sky: frame,
    ...(frame.beam && { beam: frame.beam }),
    quantity: 'Faraday spectrum',
    unit,
    firstDepthRadM2: plan.firstDepth,
    depthStepRadM2: plan.step,
    depthCount: plan.count,
    referenceLambdaM2: plan.referenceLambda2,
    comments: ['Absolute value of the Faraday spectrum.'],
  };
  const stream = streamDepthCube(join(folder.path, cubeName), about, provenance);
  folder.addBegun(cubeName, stream);
  return stream;
}

/** Depths from Faraday spectra of all bands together, some rows at a time; |F| goes to `stream`. */
export async function depthsOfSpectra({ frame, bands }: MapData, plan: DepthPlan, stream: DepthCubeStream, search: DepthMapOptions): Promise<DepthMaps> {
  return depthMaps(joinedRows(bands, frame.nx, frame.ny), plan, { ...search, onRows: (from, to, amplitude) => stream.write(from, to, amplitude) });
}

/** Where there are only two channels: depths from the turn of the angle; undefined where there is one. */
export function depthsOfAngles(data: MapData, orientation: DiscOrientation): DepthMaps | undefined {
  if (data.bands.reduce((sum, band) => sum + band.channels.length, 0) < 2) return undefined;
  const { nx, ny } = data.frame;
  const { rm, rmError, chi0, chi0Error, fieldAngle } = fittedRotation(data, orientation);
  const blank = (): Float64Array => new Float64Array(nx * ny).fill(NaN);
  const { Q, U, noise } = planesOfChannels(data.bands[0], [0]);
  return { depth: rm, depthError: rmError, chi0, chi0Error, fieldAngle, P: Q.map((q, k) => Math.hypot(q, U[k])), PError: Q.map(() => noise[0]), momentTotal: blank(), momentMean: blank(), momentWidth: blank() };
}

/** Adds the maps that Faraday spectra, or the fit of angles, give. */
export function addDepthFiles(folder: OutputFolder, data: MapData, plan: DepthPlan | undefined, maps: DepthMaps, provenance: Provenance): void {
  const shared = { sky: data.frame, ...(data.frame.beam && { beam: data.frame.beam }) };
  const add = (name: string, quantity: string, unit: string, values: Float64Array, comment: string): void =>
    folder.add(`${name}.fits`, mapFits({ ...shared, quantity, unit, values, comments: [comment] }, provenance, 32));
  add('RM', 'RM', 'rad/m2', maps.depth, plan ? 'Depth of the highest peak of the Faraday spectrum.' : 'Slope of the angle over wavelength squared.');
  add('RM-error', 'RM error', 'rad/m2', maps.depthError, 'One standard deviation, from the noise of the channels.');
  add('fieldAngle', 'fieldAngle', 'deg', inDegrees(maps.fieldAngle), 'Faraday-corrected orientation of the magnetic field, north through east.');
  if (!plan) return;
  add('peakP', 'P', data.unit, maps.P, 'Height of the highest peak of the Faraday spectrum, without its bias.');
  add('momentMean', 'mean Faraday depth', 'rad/m2', maps.momentMean, 'First moment of the Faraday spectrum above the threshold.');
  add('momentWidth', 'width in Faraday depth', 'rad/m2', maps.momentWidth, 'Root of the second moment about the first.');
}
