import { join } from 'node:path';
import { streamDepthCube } from '../files/depth-cube-stream.ts';
import type { Provenance } from '../files/fits-scene.ts';
import { depthCubeFits, mapFits } from '../files/sky-fits-write.ts';
import type { DiscOrientation } from '../measure/disc.ts';
import { depthMaps, rowsOfPlanes, type DepthMapOptions, type DepthMaps } from '../sky/depth-maps.ts';
import type { DepthPlan } from '../sky/depth-spectrum.ts';
import { inDegrees } from '../sky/derived.ts';
import { speedOfLight } from '../units/constants.ts';
import type { LargeMaps, MapBand, MapData } from './measure-input.ts';
import { fittedRotation } from './measure-run.ts';
import type { OutputFolder } from './output-folder.ts';

/** Depths from Faraday spectra, or from the fit of angles where there are only two channels. */
export async function findDepths(
  data: MapData,
  plan: DepthPlan | undefined,
  orientation: DiscOrientation,
  search: DepthMapOptions,
): Promise<{ maps?: DepthMaps; cube?: Float64Array }> {
  const { nx, ny } = data.frame;
  if (!plan) {
    if (data.bands.reduce((sum, band) => sum + band.channels.length, 0) < 2) return {};
    const { rm, rmError, chi0, chi0Error, fieldAngle } = fittedRotation(data, data.bands, orientation);
    const blank = (): Float64Array => new Float64Array(nx * ny).fill(NaN);
    const P = data.bands[0].Q.subarray(0, nx * ny).map((q, k) => Math.hypot(q, data.bands[0].U[k]));
    return { maps: { depth: rm, depthError: rmError, chi0, chi0Error, fieldAngle, P, PError: P.map(() => data.bands[0].noise[0]), momentTotal: blank(), momentMean: blank(), momentWidth: blank() } };
  }
  const join = (pick: 'Q' | 'U'): Float64Array => {
    const all = new Float64Array(data.bands.reduce((sum, band) => sum + band[pick].length, 0));
    let at = 0;
    for (const band of data.bands) {
      all.set(band[pick], at);
      at += band[pick].length;
    }
    return all;
  };
  const cube = new Float64Array(plan.count * nx * ny);
  const onRows = (from: number, to: number, amplitude: Float64Array): void => {
    const pixels = (to - from) * nx;
    for (let index = 0; index < plan.count; index++) cube.set(amplitude.subarray(index * pixels, (index + 1) * pixels), (index * ny + from) * nx);
  };
  const maps = await depthMaps(rowsOfPlanes(join('Q'), join('U'), nx, ny), plan, { ...search, onRows });
  return { maps, cube };
}

/** The same of cubes read by rows; the cube of the spectra goes to its file as it is made. */
export async function largeDepths({ data, source }: LargeMaps, plan: DepthPlan, out: string, provenance: Provenance, search: DepthMapOptions): Promise<{ maps: DepthMaps; cube?: undefined }> {
  const stream = streamDepthCube(join(out, 'faraday-spectrum.fits'), depthCubeAbout(data, plan), provenance);
  try {
    const maps = await depthMaps(source, plan, { ...search, onRows: (from, to, amplitude) => stream.write(from, to, amplitude) });
    stream.finish();
    return { maps };
  } catch (error) {
    stream.abandon();
    throw error;
  }
}

/** The peak of the spectra as a band at their reference wavelength, for profiles where no channel is in memory. */
export function peakBand(plan: DepthPlan, { P, chi0, depth }: DepthMaps): MapBand {
  const frequencyHz = speedOfLight.value / Math.sqrt(plan.referenceLambda2);
  // Regions take sigma^2 off P^2: here the peak has lost its bias already.
  const part = (wave: (angle: number) => number): Float64Array => P.map((value, k) => Math.hypot(value, plan.noise) * wave(2 * (chi0[k] + depth[k] * plan.referenceLambda2)));
  return { name: 'peak', channels: [{ frequencyHz, widthHz: 0 }], Q: part(Math.cos), U: part(Math.sin), noise: Float64Array.of(plan.noise) };
}

function depthCubeAbout(data: MapData, plan: DepthPlan): Omit<Parameters<typeof depthCubeFits>[0], 'values'> {
  const { frame, unit } = data;
  return {
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
}

/** Adds the maps that Faraday spectra, or the fit of angles, give; and the cube where it is in memory. */
export function addDepthFiles(folder: OutputFolder, data: MapData, plan: DepthPlan | undefined, maps: DepthMaps, cube: Float64Array | undefined, provenance: Provenance): void {
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
  if (cube) folder.add('faraday-spectrum.fits', depthCubeFits({ ...depthCubeAbout(data, plan), values: cube }, provenance, 32));
}
