import { frameFromGrid, pixelsPerBeam, type DiscOrientation, type MapFrame } from '../measure/disc.ts';
import { makeLayout, type Layout } from '../measure/layout.ts';
import { measureRegions, type RegionValues } from '../measure/region.ts';
import type { Ring } from '../measure/ring-profile.ts';
import type { Scene } from '../scene/types.ts';
import { centreMaps, type CentreMaps } from '../sky/band-centre.ts';
import { addNoise } from '../sky/noise.ts';
import type { ObservedSky } from '../sky/observe.ts';
import { rotationMeasureMaps, type RotationMeasureMaps } from '../sky/rotation-measure-map.ts';
import type { StokesCube } from '../sky/types.ts';

/** One band of a sky at its centre, with the regions of the layout measured on it. */
export interface BandView {
  readonly name: string;
  readonly cube: StokesCube;
  readonly centre: CentreMaps;
  /** rms of Q and U at the centre that errors come from; 0 where the scene states no noise. */
  readonly sigma: number;
  /** |P| of the pixels; without the bias of noise where noise was drawn. */
  readonly P: Float64Array;
  readonly regions: readonly RegionValues[];
  /** Height of origin at the band's centre, kpc, before any beam. */
  readonly originKpc: Float64Array;
}

/** A sky seen once, ready to be measured. */
export interface SkyView {
  readonly scene: Scene;
  readonly frame: MapFrame;
  readonly orientation: DiscOrientation;
  readonly layout: Layout;
  /** Azimuth of every region, rad; that of the box's place beside the axes where there are strips. */
  readonly azimuth: readonly number[];
  readonly bands: readonly BandView[];
  readonly threshold: number;
  /** RM over all bands, made when first asked for. */
  rotation(): RotationMeasureMaps;
}

/** A scene whose noise is left out, for rays that serve many draws of it. */
export function withoutNoise(scene: Scene): Scene {
  return { ...scene, observation: { ...scene.observation, noise: undefined, bands: scene.observation.bands.map((band) => ({ ...band, noise: undefined })) } };
}

/**
 * One look at a sky that was observed without noise: with noise of the scene drawn from `seed`, or, for
 * `undefined`, as expected, where noise gives errors but changes no value. Discs more than 75 deg from
 * face-on are measured in strips beside the axes.
 */
export function viewSky(scene: Scene, sky: ObservedSky, ring: Ring, threshold: number, seed: number | undefined): SkyView {
  const { galaxy, observation } = scene;
  const frame = frameFromGrid(sky.grid, observation.beam);
  const orientation = { inclination: galaxy.inclination, positionAngle: galaxy.positionAngle, distanceKpc: galaxy.distanceKpc };
  const layout = makeLayout(frame, orientation, { edgesKpc: [ring.innerKpc, ring.outerKpc], sectors: ring.sectors });
  const cubes = sky.cubes.map((cube, k): StokesCube => {
    const rms = observation.bands[k].noise ?? observation.noise ?? 0;
    if (!(rms > 0)) return cube;
    return seed === undefined ? { ...cube, noise: cube.noise.map((before) => Math.hypot(before, rms)) } : addNoise(cube, rms, seed);
  });
  const perBeam = pixelsPerBeam(frame);
  const shared = sharedNoise(layout, perBeam);
  const bands = cubes.map((cube, k): BandView => {
    const centre = centreMaps(cube);
    const drawn = seed === undefined ? 0 : centre.noise;
    const measured = measureRegions({ Q: centre.Q, U: centre.U, sigmaQU: drawn, ...(centre.I && { I: centre.I, sigmaI: drawn }) }, layout.regionOf, layout.regions.length, perBeam);
    const { heightKpc, frequenciesHz } = sky.origins[k];
    const pixels = frame.nx * frame.ny;
    const middle = Math.floor((frequenciesHz.length - 1) / 2);
    return {
      name: cube.band,
      cube,
      centre,
      sigma: centre.noise,
      P: seed === undefined ? centre.P : centre.debiasedP,
      regions: measured.map((region) => withErrors(region, centre.noise * shared)),
      originKpc: heightKpc.subarray(middle * pixels, (middle + 1) * pixels),
    };
  });
  let rotation: RotationMeasureMaps | undefined;
  return {
    scene, frame, orientation, layout, bands, threshold,
    azimuth: azimuths(layout, galaxy.inclination),
    rotation: () => (rotation ??= rotationMeasureMaps(cubes)),
  };
}

/** By how much errors of small regions grow because a beam covers several: no region counts as less than one beam. */
function sharedNoise({ regionOf, regions }: Layout, perBeam: number): number {
  const pixels = new Float64Array(regions.length);
  for (const region of regionOf) if (region >= 0) pixels[region]++;
  const counted = pixels.reduce((sum, count) => sum + (count > 0 ? Math.max(1, count / perBeam) : 0), 0);
  const whole = Math.max(1, pixels.reduce((sum, count) => sum + count, 0) / perBeam);
  return Math.sqrt(Math.max(1, counted / whole));
}

/** Errors that noise gives the means of a region. */
function withErrors(region: RegionValues, sigma: number): RegionValues {
  const error = region.beams > 0 ? sigma / Math.sqrt(region.beams) : NaN;
  return { ...region, P: { ...region.P, error }, ...(region.I && { I: { ...region.I, error } }) };
}

/** Sectors have their azimuth; a box has that of a disc point seen at its middle. */
function azimuths({ kind, regions }: Layout, inclination: number): number[] {
  if (kind === 'rings') return regions.map(({ azimuth }) => azimuth);
  const turn = Math.cos(inclination) < 0 ? -1 : 1;
  return regions.map(({ innerKpc, outerKpc, alongKpc }) => Math.atan2(turn * alongKpc, (innerKpc + outerKpc) / 2));
}

/** Mean of values over the pixels of the layout where both are known, each counted with its weight. */
export function layoutMean({ layout }: Pick<SkyView, 'layout'>, values: ArrayLike<number>, weights?: ArrayLike<number>): number {
  let [sum, total] = [0, 0];
  layout.regionOf.forEach((region, k) => {
    const weight = weights ? weights[k] : 1;
    if (region < 0 || !Number.isFinite(values[k]) || !(weight > 0)) return;
    sum += weight * values[k];
    total += weight;
  });
  return total > 0 ? sum / total : NaN;
}

/** Beams within the layout's pixels, at least 1. */
export function layoutBeams({ layout, frame }: Pick<SkyView, 'layout' | 'frame'>): number {
  const pixels = layout.regionOf.reduce((count, region) => count + (region >= 0 ? 1 : 0), 0);
  return Math.max(1, pixels / pixelsPerBeam(frame));
}
