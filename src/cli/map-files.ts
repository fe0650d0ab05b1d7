import { join } from 'node:path';
import { overviewSvg } from '../figure/overview.ts';
import { skyOverview } from '../figure/sky-overview.ts';
import { streamCube, type CubeStream } from '../files/cube-stream.ts';
import type { Provenance } from '../files/fits-scene.ts';
import { mapFits, stokesUnits } from '../files/sky-fits-write.ts';
import { sha256OfText } from '../files/sha256.ts';
import type { Watch } from '../ray/job.ts';
import type { Scene } from '../scene/types.ts';
import { centreMaps, channelMaps, middleChannels, type CentreMaps, type ChannelPlanes } from '../sky/band-centre.ts';
import { angleError, fractionError, inDegrees, polarizedFraction } from '../sky/derived.ts';
import { gridOffsetsKpc } from '../sky/grid.ts';
import type { SeenBand, SeenSky } from '../sky/observe.ts';
import { rotationMeasureRows, type FittedChannel, type RotationMeasureMaps } from '../sky/rotation-measure-map.ts';
import type { SkyGrid, StokesCube } from '../sky/types.ts';
import { channelLambda2M2 } from '../sky/wavelength.ts';
import { addOriginFiles, originMaps, type OriginWatch } from './origin-files.ts';
import type { OutputFolder } from './output-folder.ts';

/** Channels that are made and written together. */
const channelsAtOnce = 8;

/** What was seen while a band was written. */
export interface WrittenBand {
  readonly band: SeenBand;
  /** Maps at its centre. */
  readonly centre: CentreMaps;
  readonly fitted: readonly FittedChannel[];
  readonly largestI: number;
  /** Its cubes of Q and U, which can be read back by rows. */
  readonly Q: CubeStream;
  readonly U: CubeStream;
}

/** Writes every map of a scene as seen, and an overview of them, cubes a few channels at a time. */
export async function addMapFiles(folder: OutputFolder, scene: Scene, sky: SeenSky, provenance: Provenance, watch: Watch): Promise<readonly WrittenBand[]> {
  const { bits } = scene.numerics;
  const written: WrittenBand[] = [];
  for (const band of sky.bands) {
    written.push(await writeCubes(folder, band, provenance, bits, watch));
    const single = scene.observation.bands.find(({ name }) => name === band.band)?.centreHz !== undefined || band.channels.length === 1;
    const maps = single ? [written[written.length - 1].centre] : band.channels.map((_, channel) => channelMaps(someChannels(band, [channel]), 0));
    addDerivedMaps(folder, band, maps, provenance, bits);
  }
  for (const origin of sky.origins) {
    const comments = ['Mean height at which the polarized emission seen arises, weighted by its net share; no beam.'];
    const common = { quantity: 'originHeight', unit: 'kpc', sky: sky.grid, band: origin.band, comments };
    const channels = origin.frequenciesHz.map((frequencyHz) => ({ frequencyHz, widthHz: 0 }));
    folder.add(`originHeight-${origin.band}.fits`, planesFits(common, origin.heightKpc, channels, provenance, bits));
  }
  const depthComments = ['Total Faraday depth along each line of sight, foreground included; no beam.'];
  folder.add('faradayDepth.fits', mapFits({ quantity: 'faradayDepth', unit: 'rad/m2', sky: sky.grid, values: sky.faradayDepth, comments: depthComments }, provenance, bits));
  const rm = fitWritten(sky.grid, written);
  if (rm) {
    const shared = { unit: 'rad/m2', sky: sky.grid, ...(sky.bands[0].beam && { beam: sky.bands[0].beam }) };
    folder.add('RM.fits', mapFits({ quantity: 'RM', values: rm.rm, ...shared }, provenance, bits));
    folder.add('RM-error.fits', mapFits({ quantity: 'RM error', values: rm.rmError, ...shared }, provenance, bits));
    folder.add('fieldAngle.fits', mapFits({ quantity: 'fieldAngle', values: inDegrees(rm.fieldAngle), ...shared, unit: 'deg', comments: ['Faraday-corrected orientation of the magnetic field, north through east.'] }, provenance, bits));
  }
  const bands = written.map(({ band, centre }) => ({ unit: band.unit, maps: centre }));
  folder.add('overview.svg', overviewSvg(skyOverview(scene, { grid: sky.grid, bands }, rm)));
  return written;
}

/** Some channels of a band with all that is known of them. */
function someChannels(band: SeenBand, channels: readonly number[]): ChannelPlanes {
  const noise = channels.map((channel) => band.noise[channel]);
  return { channels: channels.map((channel) => band.channels[channel]), noise, ...band.planes(channels[0], channels[channels.length - 1] + 1) };
}

/** Writes a band's cubes of I, Q and U beside their places, a few channels at a time. */
async function writeCubes(folder: OutputFolder, band: SeenBand, provenance: Provenance, bits: 32 | 64, { signal, onProgress }: Watch): Promise<WrittenBand> {
  const [I, Q, U] = (['I', 'Q', 'U'] as const).map((stokes) => {
    const name = `${stokes}-${band.band}.fits`;
    const stream = streamCube(join(folder.path, name), stokesUnits(band, stokes, provenance, bits));
    folder.addBegun(name, stream);
    return stream;
  });
  const count = band.channels.length;
  const fitted: FittedChannel[] = [];
  let largestI = -Infinity;
  for (let from = 0; from < count; from += channelsAtOnce) {
    await new Promise((resolve) => setImmediate(resolve));
    signal?.throwIfAborted();
    const to = Math.min(count, from + channelsAtOnce);
    const planes = band.planes(from, to);
    I.writeLayers(from, planes.I);
    Q.writeLayers(from, planes.Q);
    U.writeLayers(from, planes.U);
    for (const value of planes.I) if (value > largestI) largestI = value;
    const pixels = planes.Q.length / (to - from);
    for (let channel = from; channel < to; channel++) {
      let square = 0;
      for (let k = (channel - from) * pixels; k < (channel - from + 1) * pixels; k++) square = Math.max(square, planes.Q[k] * planes.Q[k] + planes.U[k] * planes.U[k]);
      fitted.push({ lambda2M2: channelLambda2M2(band.channels[channel]), sigma: band.noise[channel], largestP: Math.sqrt(square) });
    }
    onProgress?.(to, count);
  }
  return { band, centre: centreMaps(someChannels(band, middleChannels(count))), fitted, largestI, Q, U };
}

/** Adds maps of the layers that every band sees at the frequencies of its `originHeight`. */
export async function addOriginMaps(folder: OutputFolder, scene: Scene, sky: SeenSky, provenance: Provenance, watch: Omit<OriginWatch, 'pause'>): Promise<void> {
  const spectrum = sky.origins.flatMap(({ frequenciesHz }) => frequenciesHz.map((frequencyHz) => ({ frequencyHz, centreHz: frequencyHz })));
  const pause = (): Promise<void> => new Promise((resolve) => setImmediate(resolve));
  const maps = await originMaps(scene, gridOffsetsKpc(sky.grid), spectrum, { ...watch, pause });
  let first = 0;
  for (const { band, frequenciesHz } of sky.origins) {
    addOriginFiles(folder, band, sky.grid, frequenciesHz, first, maps, provenance, scene.numerics.bits);
    first += frequenciesHz.length;
  }
}

/** RM over all bands from their cubes as they were written, or undefined where there is only one wavelength. */
function fitWritten(grid: SkyGrid, written: readonly WrittenBand[]): RotationMeasureMaps | undefined {
  const channels = written.flatMap(({ fitted }) => fitted);
  if (new Set(written.flatMap(({ band }) => band.channels.map(({ frequencyHz }) => frequencyHz))).size < 2) return undefined;
  const joined = (parts: readonly Float64Array[], length: number): Float64Array => {
    const whole = new Float64Array(length);
    parts.reduce((at, part) => (whole.set(part, at), at + part.length), 0);
    return whole;
  };
  return rotationMeasureRows(grid, channels, (from, to) => {
    const length = channels.length * (to - from) * grid.nx;
    return { Q: joined(written.map(({ Q }) => Q.readRows(from, to)), length), U: joined(written.map(({ U }) => U.readRows(from, to)), length) };
  });
}

function addDerivedMaps(folder: OutputFolder, cube: SeenBand, maps: readonly CentreMaps[], provenance: Provenance, bits: 32 | 64): void {
  const channels = maps.map(({ frequencyHz }) => ({ frequencyHz, widthHz: 0 }));
  const common = { sky: cube.grid, band: cube.band, ...(cube.beam && { beam: cube.beam }) };
  const add = (name: string, quantity: string, unit: string, plane: (map: CentreMaps) => Float64Array): void => {
    const values = new Float64Array(maps.length * cube.grid.nx * cube.grid.ny);
    maps.forEach((map, k) => values.set(plane(map), k * cube.grid.nx * cube.grid.ny));
    folder.add(`${name}-${cube.band}.fits`, planesFits({ quantity, unit, ...common }, values, channels, provenance, bits));
  };
  const fraction = (map: CentreMaps): Float64Array => polarizedFraction(map.P, map.I ?? map.P, 0);
  add('P', 'P', cube.unit, (map) => map.P);
  add('fraction', 'fraction', '', fraction);
  add('chi', 'chi', 'deg', (map) => inDegrees(map.chi));
  if (maps[0].noise === 0) return;
  add('P-debiased', 'P debiased', cube.unit, (map) => map.debiasedP);
  add('P-error', 'P error', cube.unit, (map) => map.P.map(() => map.noise));
  add('fraction-error', 'fraction error', '', (map) => fractionError(map.P, map.I ?? map.P, map.noise, map.noise, 0));
  add('chi-error', 'chi error', 'deg', (map) => inDegrees(angleError(map.P, map.noise)));
}

/** A map where there is one frequency, else a cube with a frequency axis. */
function planesFits(
  about: Omit<Parameters<typeof mapFits>[0], 'values'>,
  values: Float64Array,
  channels: StokesCube['channels'],
  provenance: Provenance,
  bits: 32 | 64,
): Uint8Array {
  if (channels.length === 1) return mapFits({ ...about, values, frequencyHz: channels[0].frequencyHz }, provenance, bits);
  return mapFits({ ...about, values, channels }, provenance, bits);
}

/** What `summary.json` says of a run of `map`. */
export function mapSummary(scene: Scene, sky: SeenSky, written: readonly WrittenBand[], provenance: Provenance, seconds: number, files: readonly string[]): Record<string, unknown> {
  const { beam } = scene.observation;
  return {
    title: scene.title,
    version: provenance.version,
    seed: provenance.seed,
    sceneSha256: sha256OfText(provenance.sceneText),
    ...(provenance.inputs && { inputs: provenance.inputs }),
    image: { nx: sky.grid.nx, ny: sky.grid.ny, pixelArcsec: sky.grid.pixelArcsec, pixelKpc: sky.grid.pixelKpc },
    bands: written.map(({ band: cube, largestI, fitted }) => ({
      name: cube.band,
      unit: cube.unit,
      frequenciesHz: cube.channels.map((channel) => channel.frequencyHz),
      widthsHz: cube.channels.map((channel) => channel.widthHz),
      noise: Array.from(cube.noise),
      largestI,
      largestP: Math.max(...fitted.map(({ largestP }) => largestP)),
    })),
    beam: beam ? { majorArcsec: beam.majorArcsec, minorArcsec: beam.minorArcsec, angleDeg: (beam.angle * 180) / Math.PI } : null,
    tolerance: { asked: scene.numerics.tolerance, reached: sky.errorReached },
    rays: sky.rays,
    raysFollowed: sky.raysFollowed,
    samplesPerRay: sky.samplesPerRay,
    seconds,
    files,
  };
}
