import type { RayBackend, Watch } from '../ray/job.ts';
import type { RayBundle, RayResult } from '../ray/types.ts';
import type { Band, Scene } from '../scene/types.ts';
import { coefficientReader, toCoefficients, type BandCoefficients } from './band-coefficients.ts';
import { channelMatrix, channelSpectrum, makeBandNodes, type BandNodes } from './band-nodes.ts';
import type { Interpolation } from './band-pilot.ts';
import { interpolationError, isNegligible } from './band-tails.ts';
import type { ChannelBasis } from './channel-basis.ts';
import { faintness, traceFaintToo } from './faint-rays.ts';
import { turnByForeground } from './foreground.ts';

/** A band as its coefficients tell it, with the largest error of that and the samples it took further. */
export interface InterpolatedBand {
  readonly basis: ChannelBasis;
  readonly error: number;
  readonly samples: number;
}

export interface BandRays {
  readonly scene: Scene;
  readonly bundle: RayBundle;
  readonly foreground: number | Float64Array;
  readonly backend: RayBackend;
  readonly watch: Watch;
}

/** From one round to the next, nodes for rays that had too few. */
const growth = 1.6;
/** Rays that would need more nodes than so many times those of the others end the attempt. */
const mostGrowth = 24;

/**
 * The basis of a band's channels from values at its nodes, `planes` (turned by the foreground, and
 * overwritten here). Rays whose coefficients do not end there are followed at more nodes; undefined
 * where some would never end.
 */
export async function interpolateBand(band: Band, planes: BandCoefficients, { nodes, scale, isPlainI }: Interpolation, rays: BandRays): Promise<InterpolatedBand | undefined> {
  const { scene, bundle } = rays;
  const { index } = scene.cosmicRays;
  const { tolerance } = scene.numerics;
  const offsets = nodes.offsetsHz.length;
  const pixels = bundle.northKpc.length;
  const shares = faintness({ I: planes.I.subarray(0, pixels) });
  for (const values of [planes.I, planes.Q, planes.U]) toCoefficients(values, nodes, index);
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
  let whole: BandCoefficients = isPlainI ? { ...planes, I: planes.I.slice(0, pixels) } : planes;
  let all = nodes;
  let left = unfinished(planes, nodes, Int32Array.from({ length: pixels }, (_, k) => k));
  while (left.length > 0) {
    all = makeBandNodes(band.channels, Math.ceil(growth * all.degrees) + 2, offsets);
    if (all.degrees > mostGrowth * nodes.degrees) return undefined;
    const more = await followPixels(all, left, rays);
    samples += more.samples;
    whole = extended(whole, more, left, pixels, isPlainI);
    left = unfinished(more, all, left);
  }
  const matrix = channelMatrix(all, band.channels, index);
  const I = { planes: whole.I, matrix: isPlainI ? channelSpectrum(band.channels, index) : matrix };
  const basis = { I, Q: { planes: whole.Q, matrix }, U: { planes: whole.U, matrix } };
  return { basis, error: largestError, samples };
}

/** Coefficients of some pixels at other nodes. */
async function followPixels(nodes: BandNodes, pixels: Int32Array, { scene, bundle, foreground, backend, watch }: BandRays): Promise<RayResult> {
  const at = (values: Float64Array): Float64Array => Float64Array.from(pixels, (pixel) => values[pixel]);
  const some = { northKpc: at(bundle.northKpc), eastKpc: at(bundle.eastKpc) };
  const seen = await traceFaintToo(backend, { scene, spectrum: nodes.spectrum, bundle: some, origins: false }, { signal: watch.signal });
  turnByForeground(seen.Q, seen.U, nodes.spectrum.map(({ frequencyHz }) => frequencyHz), typeof foreground === 'number' ? foreground : at(foreground));
  for (const values of [seen.I, seen.Q, seen.U]) toCoefficients(values, nodes, scene.cosmicRays.index);
  return seen;
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

