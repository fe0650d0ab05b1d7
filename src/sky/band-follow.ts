import type { RayBackend, Watch } from '../ray/job.ts';
import type { RayBundle, RayResult } from '../ray/types.ts';
import type { Band, Scene } from '../scene/types.ts';
import { coefficientReader, toCoefficients, type BandCoefficients } from './band-coefficients.ts';
import { channelMatrix, channelSpectrum, makeBandNodes, spectrumAt, type BandNodes } from './band-nodes.ts';
import { moreDegrees, type Interpolation } from './band-pilot.ts';
import { interpolationError, isNegligible } from './band-tails.ts';
import { channelMaker, type ChannelBasis } from './channel-basis.ts';
import { faintness, traceFaintToo } from './faint-rays.ts';
import { turnByForeground } from './foreground.ts';
import { originHeights, type OriginMoments } from './origin-heights.ts';

/** A band as its coefficients tell it, with the largest error of that and the samples it took further. */
export interface InterpolatedBand {
  readonly basis: ChannelBasis;
  /** Heights of origin at each channel's centre, kpc, where they were asked for. */
  readonly originKpc?: Float64Array;
  readonly error: number;
  readonly samples: number;
}

/** Values at nodes, planes [node * pixels + pixel], with those for heights of origin where they are wanted. */
export interface BandValues extends BandCoefficients {
  readonly moments?: Pick<OriginMoments, 'heightQ' | 'heightU' | 'emittedP'>;
}

export interface BandRays {
  readonly scene: Scene;
  readonly bundle: RayBundle;
  readonly foreground: number | Float64Array;
  readonly backend: RayBackend;
  readonly watch: Watch;
}

/** Rays that would need so many times the nodes of the pilot's worst end the attempt. */
const mostGrowth = 8;

/**
 * The basis of a band's channels from values at its nodes, `planes` (turned by the foreground, and
 * overwritten here); heights of origin too where those of the nodes are there. Rays whose coefficients do not end there are followed at more nodes; undefined
 * where some would never end.
 */
export async function interpolateBand(band: Band, planes: BandValues, { nodes, mostDegrees, scale, isPlainI }: Interpolation, rays: BandRays): Promise<InterpolatedBand | undefined> {
  const { scene, bundle } = rays;
  const { index } = scene.cosmicRays;
  const { tolerance } = scene.numerics;
  const offsets = nodes.offsetsHz.length;
  const pixels = bundle.northKpc.length;
  const shares = faintness({ I: planes.I.subarray(0, pixels) });
  coefficientsOf(planes, nodes, index, isPlainI);
  const originKpc = heightsOf(planes, nodes, band, index);
  let largestError = 0;
  let samples = 0;
  const unfinished = (coefficients: BandCoefficients, own: BandNodes, indices: Int32Array): Int32Array => {
    const read = coefficientReader(coefficients, indices.length);
    return indices.filter((pixel, k) => {
      const error = interpolationError(read(k), own.degrees, offsets, scale, shares[pixel]);
      if (!isNegligible(error, tolerance)) return true;
      largestError = Math.max(largestError, error);
      return false;
    });
  };
  let whole: BandCoefficients = { I: isPlainI ? planes.I.slice(0, pixels) : planes.I, Q: planes.Q, U: planes.U };
  let all = nodes;
  let left = unfinished(planes, nodes, Int32Array.from({ length: pixels }, (_, k) => k));
  while (left.length > 0) {
    all = makeBandNodes(band.channels, moreDegrees(all.degrees), offsets);
    if (all.degrees > mostGrowth * mostDegrees) return undefined;
    const more = await followPixels(all, left, rays, planes.moments !== undefined);
    coefficientsOf(more, all, index, isPlainI);
    samples += more.samples;
    const heights = heightsOf(more, all, band, index);
    if (heights) left.forEach((pixel, k) => band.channels.forEach((_, channel) => (originKpc![channel * pixels + pixel] = heights[channel * left.length + k])));
    whole = extended(whole, more, left, pixels, isPlainI);
    left = unfinished(more, all, left);
  }
  const matrix = channelMatrix(all, band.channels, index);
  const I = { planes: whole.I, matrix: isPlainI ? channelSpectrum(band.channels, index) : matrix };
  const basis = { I, Q: { planes: whole.Q, matrix }, U: { planes: whole.U, matrix } };
  return { basis, error: largestError, samples, ...(originKpc && { originKpc }) };
}

/** Values at nodes made coefficients, in place; of a plain I there is only one, whatever the others hold. */
function coefficientsOf({ I, Q, U }: BandCoefficients, nodes: BandNodes, index: number, isPlainI: boolean): void {
  toCoefficients(Q, nodes, index);
  toCoefficients(U, nodes, index);
  if (!isPlainI) toCoefficients(I, nodes, index);
  const pixels = isPlainI ? I.length / nodes.spectrum.length : 0;
  const [spectrum] = spectrumAt(index, nodes.spectrum);
  for (let pixel = 0; pixel < pixels; pixel++) I[pixel] /= spectrum;
  if (isPlainI) I.fill(0, pixels);
}

/** Heights of origin at a band's channels [channel * pixels + pixel] from coefficients of Q and U and moments at its nodes, which are overwritten. */
function heightsOf({ Q, U, moments }: BandValues, nodes: BandNodes, { channels }: Band, index: number): Float64Array | undefined {
  if (!moments) return undefined;
  const { heightQ, heightU, emittedP } = moments;
  const pixels = Q.length / nodes.spectrum.length;
  const matrix = channelMatrix(nodes, channels.map(({ frequencyHz }) => ({ frequencyHz, widthHz: 0 })), index);
  const at = (planes: Float64Array): Float64Array => channelMaker({ planes, matrix }, pixels)(0, channels.length);
  for (const planes of [heightQ, heightU, emittedP]) toCoefficients(planes, nodes, index);
  return originHeights({ Q: at(Q), U: at(U), heightQ: at(heightQ), heightU: at(heightU), emittedP: at(emittedP) });
}

/** Values of some pixels at other nodes, turned by the foreground. */
async function followPixels(nodes: BandNodes, pixels: Int32Array, { scene, bundle, foreground, backend, watch }: BandRays, withMoments: boolean): Promise<BandValues & Pick<RayResult, 'samples'>> {
  const at = (values: Float64Array): Float64Array => Float64Array.from(pixels, (pixel) => values[pixel]);
  const some = { northKpc: at(bundle.northKpc), eastKpc: at(bundle.eastKpc) };
  const seen = await traceFaintToo(backend, { scene, spectrum: nodes.spectrum, bundle: some, ...(!withMoments && { origins: false }) }, { signal: watch.signal });
  const [frequenciesHz, depth] = [nodes.spectrum.map(({ frequencyHz }) => frequencyHz), typeof foreground === 'number' ? foreground : at(foreground)];
  turnByForeground(seen.Q, seen.U, frequenciesHz, depth);
  if (withMoments) turnByForeground(seen.heightQ, seen.heightU, frequenciesHz, depth);
  const { I, Q, U, samples, heightQ, heightU, emittedP } = seen;
  return { I, Q, U, samples, ...(withMoments && { moments: { heightQ, heightU, emittedP } }) };
}

/** Planes of all pixels, those of some replaced by longer series; the others' end where they did. */
function extended(whole: BandCoefficients, more: BandCoefficients, some: Int32Array, pixels: number, isPlainI: boolean): BandCoefficients {
  const grow = (name: keyof BandCoefficients): Float64Array => {
    if (name === 'I' && isPlainI) return whole.I;
    const terms = more[name].length / some.length;
    const planes = new Float64Array(terms * pixels);
    planes.set(whole[name]);
    for (let term = 0; term < terms; term++) some.forEach((pixel, k) => (planes[term * pixels + pixel] = more[name][term * some.length + k]));
    return planes;
  };
  return { I: grow('I'), Q: grow('Q'), U: grow('U') };
}

