import { fitLaws, type LawFit } from '../infer/law-fit.ts';
import { asymmetry, type Asymmetry } from '../measure/asymmetry.ts';
import { pixelsPerBeam, type DiscOrientation, type MapFrame } from '../measure/disc.ts';
import { axisGradient, gradientChange, type AxisGradient, type GradientChange } from '../measure/gradient.ts';
import { fitHarmonics, type HarmonicFit } from '../measure/harmonics.ts';
import type { Law } from '../measure/laws/types.ts';
import type { Layout } from '../measure/layout.ts';
import { pitchAngles, regionPitches, type RegionPitch } from '../measure/pitch-angle.ts';
import { measureRegions, type RegionMean, type RegionValues } from '../measure/region.ts';
import { regionSpectrum, type RegionSpectrum, type RegionSums, type SpectrumOptions } from '../measure/region-spectrum.ts';
import { centreMaps, middleChannels, type CentreMaps, type ChannelPlanes } from '../sky/band-centre.ts';
import { depthMaps, type DepthMapOptions, type DepthMaps } from '../sky/depth-maps.ts';
import { planDepths } from '../sky/depth-spectrum.ts';
import { joinedRows, type CubeSource } from '../sky/cube-source.ts';
import { arcsec } from '../sky/grid.ts';
import { rotationMeasureMaps } from '../sky/rotation-measure-map.ts';
import type { SkyGrid, StokesCube } from '../sky/types.ts';
import { channelLambda2M2 } from '../sky/wavelength.ts';
import type { MapBand, MapData } from './measure-input.ts';

/** A band as measured: its maps at the centre, its own RM where its channels give one, its regions. */
export interface MeasuredBand {
  readonly band: MapBand;
  readonly centre: CentreMaps;
  readonly rm?: { readonly rm: Float64Array; readonly rmError: Float64Array };
  readonly regions: readonly RegionValues[];
  readonly gradient?: AxisGradient;
}

/** Harmonics and asymmetries of one ring in one quantity. */
export interface RingHarmonics {
  readonly group: number;
  readonly quantity: string;
  readonly harmonics?: HarmonicFit;
  readonly approachingReceding: Asymmetry;
  readonly nearFar: Asymmetry;
}

/** Laws fitted to the light of one region. */
export interface RegionLaws {
  /** -1: the integrated light. */
  readonly region: number;
  readonly spectrum: RegionSpectrum;
  /** Best first. */
  readonly fits: readonly LawFit[];
}

const highestOrder = 3;

/** Rotation measures of all bands together by the fit of angles over lambda^2; every channel is taken into memory. */
export function fittedRotation(data: MapData, orientation: DiscOrientation): ReturnType<typeof rotationMeasureMaps> {
  return rotationMeasureMaps(data.bands.map((band) => asCube(data, band, orientation)));
}

/** Some channels of a band, in memory: [place in the list * pixels + pixel]. */
export function planesOfChannels({ channels, I, Q, U, noise }: MapBand, wanted: readonly number[]): ChannelPlanes {
  const join = (cube: CubeSource): Float64Array => {
    const planes = wanted.map((channel) => cube.plane(channel));
    const all = new Float64Array(planes.length * planes[0].length);
    planes.forEach((plane, k) => all.set(plane, k * plane.length));
    return all;
  };
  return { channels: wanted.map((k) => channels[k]), noise: wanted.map((k) => noise[k]), ...(I && { I: join(I) }), Q: join(Q), U: join(U) };
}

/** Whether a band's own channels span lambda^2 enough for an RM of its own: 2 % of it. */
function hasOwnRotation(band: MapBand): boolean {
  const squares = band.channels.map(channelLambda2M2);
  return band.channels.length > 2 && Math.max(...squares) > 1.02 * Math.min(...squares);
}

/**
 * Measures one band at its centre, with the RM that its own channels show. `whole` are the depths of all
 * bands together: those of the band where it is the only one.
 */
export async function measureBand(
  data: MapData,
  band: MapBand,
  layout: Layout,
  orientation: DiscOrientation,
  axis: number,
  whole: DepthMaps | undefined,
  { spectralIndex, ...options }: DepthMapOptions & { readonly spectralIndex: number },
): Promise<MeasuredBand> {
  const centre = centreMaps(planesOfChannels(band, middleChannels(band.channels.length)));
  const { nx, ny } = data.frame;
  const ofItsOwn = (): Promise<DepthMaps> => depthMaps(joinedRows([band], nx, ny), planDepths(band.channels, band.noise, { spectralIndex }), options);
  const own = hasOwnRotation(band) ? (data.bands.length === 1 && whole ? whole : await ofItsOwn()) : undefined;
  const rm = own && { rm: own.depth, rmError: own.depthError };
  const inside = (values: Float64Array): Float64Array => values.map((value, k) => (layout.regionOf[k] < 0 ? NaN : value));
  return {
    band,
    centre,
    ...(rm && { rm, gradient: axisGradient(inside(rm.rm), rm.rmError, data.frame, orientation, { angle: axis }) }),
    regions: measureRegions({ Q: centre.Q, U: centre.U, sigmaQU: centre.noise, ...(centre.I && { I: centre.I, sigmaI: centre.noise }), ...rm }, layout.regionOf, layout.regions.length, pixelsPerBeam(data.frame)),
  };
}

/** The RM over all bands, region by region. */
export function regionRotation(data: MapData, layout: Layout, { depth, depthError }: Pick<DepthMaps, 'depth' | 'depthError'>): RegionMean[] {
  const zero = new Float64Array(depth.length);
  const unknown = { value: NaN, error: NaN, scatter: NaN };
  return measureRegions({ Q: zero, U: zero, sigmaQU: 0, rm: depth, rmError: depthError }, layout.regionOf, layout.regions.length, pixelsPerBeam(data.frame)).map(({ rm }) => rm ?? unknown);
}

/** The change of the RM gradient with wavelength, over the bands that have an RM of their own. */
export function changeOfGradient(bands: readonly MeasuredBand[]): GradientChange | undefined {
  const own = bands.flatMap(({ band, gradient }) => (gradient && Number.isFinite(gradient.gradient) ? [{ gradient, lambda2: mean(band.channels.map(channelLambda2M2)) }] : []));
  return own.length < 2 ? undefined : gradientChange(own.map(({ lambda2 }) => lambda2), own.map(({ gradient }) => gradient));
}

/** A quantity measured in every region of a layout. */
export interface RingQuantity {
  readonly name: string;
  readonly values: readonly number[];
  readonly errors: readonly number[];
}

/** P of every band, RM over all bands, and that of every band that has one. */
export function ringQuantities(bands: readonly MeasuredBand[], rotation: readonly RegionMean[] | undefined): RingQuantity[] {
  const quantity = (name: string, means: readonly (RegionMean | undefined)[]): RingQuantity => ({ name, values: means.map((mean) => mean?.value ?? NaN), errors: means.map((mean) => mean?.error ?? NaN) });
  return [
    ...bands.map(({ band, regions }) => quantity(`P ${band.name}`, regions.map(({ P }) => P))),
    ...(rotation ? [quantity('RM', rotation)] : []),
    ...bands.flatMap(({ band, rm, regions }) => (rm ? [quantity(`RM ${band.name}`, regions.map((region) => region.rm))] : [])),
  ];
}

/** Harmonics and asymmetries of quantities, ring by ring. */
export function ringHarmonics(layout: Layout, quantities: readonly RingQuantity[]): RingHarmonics[] {
  if (layout.kind !== 'rings') return [];
  return Array.from({ length: layout.groups }, (_, group) => group).flatMap((group) => {
    const members = [...layout.regions.keys()].filter((k) => layout.regions[k].group === group);
    const azimuth = members.map((k) => layout.regions[k].azimuth);
    return quantities.map(({ name, values, errors }): RingHarmonics => {
      const own = members.map((k) => values[k]);
      const ownErrors = members.map((k) => errors[k]);
      const filled = own.filter(Number.isFinite).length;
      const known = members.every((_, k) => !Number.isFinite(own[k]) || ownErrors[k] > 0);
      const harmonics = filled > 2 * highestOrder + 1 ? fitHarmonics(azimuth, own, known ? ownErrors : undefined, highestOrder) : undefined;
      return {
        group,
        quantity: name,
        ...(harmonics && { harmonics }),
        approachingReceding: asymmetry(azimuth, own, ownErrors, 'approaching-receding'),
        nearFar: asymmetry(azimuth, own, ownErrors, 'near-far'),
      };
    });
  });
}

/** Pitch angles of the field by region, from the Faraday-corrected orientation, weighted by P. */
export function fieldPitches(frame: MapFrame, orientation: DiscOrientation, layout: Layout, maps: Pick<DepthMaps, 'fieldAngle' | 'chi0Error' | 'P'>): RegionPitch[] {
  return regionPitches(pitchAngles(maps.fieldAngle, frame, orientation), maps.chi0Error, layout.regionOf, layout.regions.length, frame, orientation, maps.P);
}

/** Fits laws to the integrated light within the layout and, where asked, to each of its regions. */
export async function fitRegionLaws(
  sums: RegionSums,
  layout: Layout,
  laws: readonly Law[],
  options: SpectrumOptions,
  withRegions: boolean,
  watch: { readonly onProgress: (done: number, total: number) => void; readonly pause: () => Promise<void>; readonly signal: AbortSignal },
): Promise<RegionLaws[]> {
  const all = [...layout.regions.keys()];
  const wanted = [-1, ...(withRegions ? all : [])];
  const found: RegionLaws[] = [];
  for (const [done, region] of wanted.entries()) {
    const spectrum = regionSpectrum(sums, region < 0 ? all : [region], options);
    const known = Array.from(spectrum.q).filter(Number.isFinite).length;
    if (known > 1) found.push({ region, spectrum, fits: await fitLaws(laws, spectrum, { signal: watch.signal }) });
    watch.onProgress(done + 1, wanted.length);
    await watch.pause();
  }
  return found;
}

function asCube({ frame, unit }: MapData, band: MapBand, { distanceKpc }: DiscOrientation): StokesCube {
  const { wcs, nx, ny } = frame;
  const pixelArcsec = 3600 * Math.sqrt(Math.abs(wcs.cd[0] * wcs.cd[3] - wcs.cd[1] * wcs.cd[2]));
  const grid: SkyGrid = { nx, ny, pixelArcsec, pixelKpc: pixelArcsec * arcsec * distanceKpc, raDeg: wcs.raDeg, decDeg: wcs.decDeg, crpixX: wcs.crpixX, crpixY: wcs.crpixY };
  const { I, Q, U } = planesOfChannels(band, [...band.channels.keys()]);
  return { band: band.name, grid, channels: band.channels, I: I ?? new Float64Array(Q.length), Q, U, unit, noise: band.noise, ...(frame.beam && { beam: frame.beam }) };
}

function mean(values: readonly number[]): number {
  return values.reduce((sum, value) => sum + value, 0) / values.length;
}
