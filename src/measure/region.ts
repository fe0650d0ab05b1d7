import { meanAndScatter } from '../math/statistics.ts';
import { debiasedIntensity, polarizedIntensity } from '../sky/derived.ts';
import { InputError } from '../units/input-error.ts';

/** One channel's or band's maps, [row * nx + column], NaN blank; errors of zero mean no noise. */
export interface MeasuredMaps {
  readonly Q: Float64Array;
  readonly U: Float64Array;
  /** rms noise of Q and of U, in their unit. */
  readonly sigmaQU: number;
  readonly I?: Float64Array;
  readonly sigmaI?: number;
  /** rad m^-2 */
  readonly rm?: Float64Array;
  readonly rmError?: Float64Array;
}

/** A mean over a region: its error from the noise alone, and the scatter of its pixels. */
export interface RegionMean {
  readonly value: number;
  readonly error: number;
  readonly scatter: number;
}

/** What is measured in one region of a map; NaN where it has no pixels. */
export interface RegionValues {
  readonly pixels: number;
  /** Independent beams, max(1, pixels / pixels per beam): errors of means are sigma/sqrt(beams). */
  readonly beams: number;
  /** Mean of the debiased |P| of the pixels. */
  readonly P: RegionMean;
  /** Angle of the summed Q + iU, rad, in (-pi/2, pi/2], and its error. */
  readonly chi: number;
  readonly chiError: number;
  readonly I?: RegionMean;
  /** Inverse-variance mean; the plain mean where there is no noise. */
  readonly rm?: RegionMean;
}

/**
 * Measures regions of a map. `regionOf` holds each pixel's region, 0 to count - 1, or -1 for none.
 * `pixelsPerBeam` is the number of pixels that share their noise. Throws InputError where the planes
 * differ in size.
 */
export function measureRegions(
  maps: MeasuredMaps,
  regionOf: Int32Array,
  count: number,
  pixelsPerBeam: number,
): RegionValues[] {
  for (const name of ['Q', 'U', 'I', 'rm', 'rmError'] as const) {
    const length = maps[name]?.length ?? regionOf.length;
    if (length !== regionOf.length) {
      throw new InputError(`the map of ${name} has ${length} pixels where its grid has ${regionOf.length}`);
    }
  }
  const members = Array.from({ length: count }, (): number[] => []);
  regionOf.forEach((region, pixel) => {
    if (region >= 0) members[region].push(pixel);
  });
  return members.map((pixels) => measureRegion(maps, pixels, pixelsPerBeam));
}

function measureRegion(maps: MeasuredMaps, inside: readonly number[], pixelsPerBeam: number): RegionValues {
  const beamsOf = (count: number): number => (count === 0 ? 0 : Math.max(1, count / pixelsPerBeam));
  const pixels = inside.filter((k) => Number.isFinite(maps.Q[k]) && Number.isFinite(maps.U[k]));
  const beams = beamsOf(pixels.length);
  const [Q, U] = [maps.Q, maps.U].map((plane) => pixels.map((k) => plane[k]));
  const sigmaMean = maps.sigmaQU / Math.sqrt(beams);
  const [meanQ, meanU] = [meanAndScatter(Q).mean, meanAndScatter(U).mean];
  const chiError = sigmaMean === 0 ? 0 : sigmaMean / (2 * Math.hypot(meanQ, meanU));
  const plainMean = (values: readonly number[], sigma: number): RegionMean => {
    const { mean, scatter, count } = meanAndScatter(values);
    return { value: mean, error: count === 0 ? NaN : sigma / Math.sqrt(beamsOf(count)), scatter };
  };
  const { I, rm } = maps;
  return {
    pixels: pixels.length,
    beams,
    P: plainMean([...debiasedIntensity(polarizedIntensity(Q, U), maps.sigmaQU)], maps.sigmaQU),
    chi: Math.atan2(meanU, meanQ) / 2,
    chiError: Math.min(chiError, Math.PI / Math.sqrt(12)),
    I: I && plainMean(inside.map((k) => I[k]), maps.sigmaI ?? 0),
    rm: rm && meanRotationMeasure(rm, maps.rmError, inside, beamsOf),
  };
}

function meanRotationMeasure(
  rm: Float64Array,
  rmError: Float64Array | undefined,
  inside: readonly number[],
  beamsOf: (count: number) => number,
): RegionMean {
  const pixels = inside.filter((k) => Number.isFinite(rm[k]) && !Number.isNaN(rmError?.[k] ?? 0));
  const { mean, scatter, count } = meanAndScatter(pixels.map((k) => rm[k]));
  const noisy = rmError !== undefined && pixels.every((k) => rmError[k] > 0);
  if (!noisy || count === 0) return { value: mean, error: count === 0 ? NaN : 0, scatter };
  let total = 0;
  let sum = 0;
  for (const k of pixels) {
    const weight = 1 / rmError[k] ** 2;
    total += weight;
    sum += weight * rm[k];
  }
  // Pixels of one beam share their noise: the error grows by the root of pixels over beams.
  return { value: sum / total, error: Math.sqrt(count / beamsOf(count) / total), scatter };
}
