import { overviewSvg } from '../figure/overview.ts';
import { skyOverview } from '../figure/sky-overview.ts';
import type { Provenance } from '../files/fits-scene.ts';
import { mapFits, stokesFits } from '../files/sky-fits-write.ts';
import { sha256OfText } from '../files/sha256.ts';
import type { Scene } from '../scene/types.ts';
import { centreMaps, channelMaps, type CentreMaps } from '../sky/band-centre.ts';
import { angleError, fractionError, inDegrees, polarizedFraction } from '../sky/derived.ts';
import { gridOffsetsKpc } from '../sky/grid.ts';
import type { ObservedSky } from '../sky/observe.ts';
import { rotationMeasureMaps, type RotationMeasureMaps } from '../sky/rotation-measure-map.ts';
import type { StokesCube } from '../sky/types.ts';
import { addOriginFiles, originMaps, type OriginWatch } from './origin-files.ts';
import type { OutputFolder } from './output-folder.ts';

/** Adds every map of an observed scene to a folder, and an overview of them. */
export function addMapFiles(folder: OutputFolder, scene: Scene, sky: ObservedSky, provenance: Provenance): void {
  const { bits } = scene.numerics;
  for (const cube of sky.cubes) {
    for (const stokes of ['I', 'Q', 'U'] as const) folder.add(`${stokes}-${cube.band}.fits`, stokesFits(cube, stokes, provenance, bits));
    const band = scene.observation.bands.find(({ name }) => name === cube.band);
    const single = band?.centreHz !== undefined || cube.channels.length === 1;
    const maps = single ? [centreMaps(cube)] : cube.channels.map((_, channel) => channelMaps(cube, channel));
    addDerivedMaps(folder, cube, maps, provenance, bits);
  }
  for (const origin of sky.origins) {
    const comments = ['Mean height at which the polarized emission seen arises, weighted by its net share; no beam.'];
    const common = { quantity: 'originHeight', unit: 'kpc', sky: sky.grid, band: origin.band, comments };
    const channels = origin.frequenciesHz.map((frequencyHz) => ({ frequencyHz, widthHz: 0 }));
    folder.add(`originHeight-${origin.band}.fits`, planesFits(common, origin.heightKpc, channels, provenance, bits));
  }
  const depthComments = ['Total Faraday depth along each line of sight, foreground included; no beam.'];
  folder.add('faradayDepth.fits', mapFits({ quantity: 'faradayDepth', unit: 'rad/m2', sky: sky.grid, values: sky.faradayDepth, comments: depthComments }, provenance, bits));
  const rm = findRotationMeasures(sky);
  if (rm) {
    const shared = { unit: 'rad/m2', sky: sky.grid, ...(sky.cubes[0].beam && { beam: sky.cubes[0].beam }) };
    folder.add('RM.fits', mapFits({ quantity: 'RM', values: rm.rm, ...shared }, provenance, bits));
    folder.add('RM-error.fits', mapFits({ quantity: 'RM error', values: rm.rmError, ...shared }, provenance, bits));
    folder.add('fieldAngle.fits', mapFits({ quantity: 'fieldAngle', values: inDegrees(rm.fieldAngle), ...shared, unit: 'deg', comments: ['Faraday-corrected orientation of the magnetic field, north through east.'] }, provenance, bits));
  }
  folder.add('overview.svg', overviewSvg(skyOverview(scene, sky, rm)));
}

/** Adds maps of the layers that every band sees at the frequencies of its `originHeight`. */
export async function addOriginMaps(folder: OutputFolder, scene: Scene, sky: ObservedSky, provenance: Provenance, watch: Omit<OriginWatch, 'pause'>): Promise<void> {
  const spectrum = sky.origins.flatMap(({ frequenciesHz }) => frequenciesHz.map((frequencyHz) => ({ frequencyHz, centreHz: frequencyHz })));
  const pause = (): Promise<void> => new Promise((resolve) => setImmediate(resolve));
  const maps = await originMaps(scene, gridOffsetsKpc(sky.grid), spectrum, { ...watch, pause });
  let first = 0;
  for (const { band, frequenciesHz } of sky.origins) {
    addOriginFiles(folder, band, sky.grid, frequenciesHz, first, maps, provenance, scene.numerics.bits);
    first += frequenciesHz.length;
  }
}

/** RM over all bands, or undefined where there is only one wavelength. */
export function findRotationMeasures(sky: Pick<ObservedSky, 'cubes'>): RotationMeasureMaps | undefined {
  const frequencies = new Set(sky.cubes.flatMap((cube) => cube.channels.map((channel) => channel.frequencyHz)));
  return frequencies.size > 1 ? rotationMeasureMaps(sky.cubes) : undefined;
}

function addDerivedMaps(folder: OutputFolder, cube: StokesCube, maps: readonly CentreMaps[], provenance: Provenance, bits: 32 | 64): void {
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
export function mapSummary(scene: Scene, sky: ObservedSky, provenance: Provenance, seconds: number, files: readonly string[]): Record<string, unknown> {
  const { beam } = scene.observation;
  return {
    title: scene.title,
    version: provenance.version,
    seed: provenance.seed,
    sceneSha256: sha256OfText(provenance.sceneText),
    ...(provenance.inputs && { inputs: provenance.inputs }),
    image: { nx: sky.grid.nx, ny: sky.grid.ny, pixelArcsec: sky.grid.pixelArcsec, pixelKpc: sky.grid.pixelKpc },
    bands: sky.cubes.map((cube) => ({
      name: cube.band,
      unit: cube.unit,
      frequenciesHz: cube.channels.map((channel) => channel.frequencyHz),
      widthsHz: cube.channels.map((channel) => channel.widthHz),
      noise: Array.from(cube.noise),
      largestI: largest(cube.I),
      largestP: largest(cube.Q.map((q, k) => Math.hypot(q, cube.U[k]))),
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

function largest(values: Float64Array): number {
  return values.reduce((most, value) => (value > most ? value : most), -Infinity);
}
