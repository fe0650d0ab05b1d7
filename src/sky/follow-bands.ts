import type { SpectralPoint } from '../ray/integrand.ts';
import type { RayBackend, Watch } from '../ray/job.ts';
import type { RayBundle, RayResult } from '../ray/types.ts';
import type { Band, Scene } from '../scene/types.ts';
import { InputError } from '../units/input-error.ts';
import { interpolateBand, type BandRays, type BandValues } from './band-follow.ts';
import { leastDegrees } from './band-tails.ts';
import { pickPilot, pilotBand, type Interpolation, type Pilot } from './band-pilot.ts';
import { bandCube } from './channel-means.ts';
import type { ChannelBasis } from './channel-basis.ts';
import { largestForeground, turnByForeground } from './foreground.ts';
import { traceImage, type ImageLattice } from './image-rays.ts';
import { originHeights, type OriginHeights } from './origin-heights.ts';
import { originFrequencies, plannedDepth, planBands, type BandPlan, type SpectralPlan } from './spectral-plan.ts';

/** How one band's channels are had. */
export type BandWay =
  /** Every frequency of every channel is followed. */
  | { readonly kind: 'direct'; readonly plan: SpectralPlan }
  /** Rays are followed at nodes in wavelength squared, and channels interpolated. */
  | { readonly kind: 'nodes'; readonly interpolation: Interpolation };

/** What the rays of an image bring, band by band, the foreground's turn included. */
export interface FollowedBands {
  readonly bases: readonly ChannelBasis[];
  /** Uncropped. */
  readonly origins: readonly OriginHeights[];
  /** Per ray, rad m^-2, without foreground. */
  readonly faradayDepth: Float64Array;
  /** Largest estimated error on the scale that `tolerance` bounds, of rays and interpolation. */
  readonly error: number;
  readonly samples: number;
  /** Rays that were followed; the others lie between them. */
  readonly followed: number;
}

/** Cost of one term of one channel's sums (Q and U of a pixel) over that of following a ray at one more frequency: an order of magnitude, no measurement; it only moves the crossover. */
const mixCost = 0.005;
/** Cost of a pilot's ray, in frequencies of a ray: what its frequencies share, and the first nodes. */
const pilotCost = 30;
/** Above this many frequencies of its own a band's heights of origin are interpolated too. */
const mostOwnOrigins = 2;

/** Chooses how each band is followed, by what either way costs; the pilot's rays find how many nodes would do. */
export async function chooseWays(scene: Scene, bundle: RayBundle, bands: readonly Band[], foreground: number | Float64Array, backend: RayBackend, watch: Watch = {}): Promise<readonly BandWay[]> {
  const depth = plannedDepth(scene, bundle, bands, { foreground: largestForeground(foreground) });
  const ways: BandWay[] = [];
  let pilot: Pilot | undefined;
  for (const band of bands) {
    const direct = directPlan(scene, band, depth);
    const count = direct instanceof InputError ? Infinity : direct.spectrum.length;
    pilot ??= pickPilot(bundle, foreground);
    const mostDegrees = Math.floor((count - pilotCost * (pilot.bundle.northKpc.length / bundle.northKpc.length)) / (1 + mixCost * band.channels.length));
    const interpolation = mostDegrees > leastDegrees ? await pilotBand(scene, band, pilot, Math.min(mostDegrees, mostNodes), backend, watch.signal) : undefined;
    if (interpolation) ways.push({ kind: 'nodes', interpolation });
    else if (direct instanceof InputError) throw direct;
    else ways.push({ kind: 'direct', plan: direct });
  }
  return ways;
}

/** No band is worth more nodes: memory. */
const mostNodes = 400;

function directPlan(scene: Scene, band: Band, largestDepth: number): SpectralPlan | InputError {
  try {
    return planBands(scene, [band], largestDepth);
  } catch (error) {
    if (error instanceof InputError) return error;
    throw error;
  }
}

/** Where a band's points stand in the spectrum of all bands together. */
interface BandPlace {
  readonly band: Band;
  readonly way: BandWay;
  /** Index of each of its own points in the spectrum of all. */
  readonly points: readonly number[];
  /** Frequencies of its heights of origin that are followed themselves. */
  readonly ownOrigins: readonly { readonly frequencyHz: number; readonly point: number }[];
  /** Whether heights of origin are interpolated from its nodes. */
  readonly interpolatesOrigins: boolean;
}

/** Follows the rays of an image for all its bands in one pass, on a lattice where one is given, and makes each band's basis of it. */
export async function followBands(
  scene: Scene,
  bundle: RayBundle,
  bands: readonly Band[],
  foreground: number | Float64Array,
  ways: readonly BandWay[],
  backend: RayBackend,
  watch: Watch = {},
  lattice: ImageLattice = { nx: bundle.northKpc.length, ny: 1, stride: 1 },
): Promise<FollowedBands> {
  const { spectrum, places, origins } = placeBands(bands, ways);
  const pixels = bundle.northKpc.length;
  const { result: rays, followed } = await traceImage(backend, { scene, spectrum, bundle, origins }, lattice, watch);
  const frequenciesHz = spectrum.map((point) => point.frequencyHz);
  turnByForeground(rays.Q, rays.U, frequenciesHz, foreground);
  const originsHz = origins.map((point) => frequenciesHz[point]);
  turnByForeground(rays.heightQ, rays.heightU, originsHz, foreground);
  const about: BandRays = { scene, bundle, foreground, backend, watch };
  const done = { bases: [] as ChannelBasis[], origins: [] as OriginHeights[], error: rays.error.reduce((a, b) => Math.max(a, b), 0), samples: rays.samples };
  for (const place of places) {
    const { band, way, points } = place;
    if (!place.interpolatesOrigins) done.origins.push(ownHeights(place, rays, origins, pixels));
    if (way.kind === 'direct') {
      done.bases.push(directBasis(way.plan.bands[0], points, rays, pixels));
      continue;
    }
    const planes = { I: planesAt(rays.I, points, pixels), Q: planesAt(rays.Q, points, pixels), U: planesAt(rays.U, points, pixels), ...momentsAt(place, rays, origins, pixels) };
    const interpolated = await interpolateBand(band, planes, way.interpolation, about);
    if (interpolated) {
      if (interpolated.originKpc) done.origins.push({ band: band.name, frequenciesHz: originFrequencies(band), heightKpc: interpolated.originKpc });
      done.bases.push(interpolated.basis);
      done.error = Math.max(done.error, rays.error.reduce((a, b) => Math.max(a, b), 0) + interpolated.error);
      done.samples += interpolated.samples;
      continue;
    }
    // A ray that the pilot could not foresee: the band is followed directly after all.
    const depth = plannedDepth(scene, bundle, [band], { foreground: largestForeground(foreground) });
    const again = await followBands(scene, bundle, [band], foreground, [{ kind: 'direct', plan: planBands(scene, [band], depth) }], backend, watch, lattice);
    done.bases.push(again.bases[0]);
    if (place.interpolatesOrigins) done.origins.push(again.origins[0]);
    done.error = Math.max(done.error, again.error);
    done.samples += again.samples;
  }
  return { ...done, faradayDepth: rays.faradayDepth, followed };
}

function placeBands(bands: readonly Band[], ways: readonly BandWay[]): { spectrum: readonly SpectralPoint[]; places: readonly BandPlace[]; origins: readonly number[] } {
  const spectrum: SpectralPoint[] = [];
  const known = new Map<string, number>();
  const place = (point: SpectralPoint): number => {
    const key = `${point.frequencyHz}/${point.centreHz}`;
    const index = known.get(key) ?? spectrum.push(point) - 1;
    known.set(key, index);
    return index;
  };
  const places = bands.map((band, k): BandPlace => {
    const way = ways[k];
    const points = (way.kind === 'direct' ? way.plan.spectrum : way.interpolation.nodes.spectrum).map((point) =>
      // Nodes of a band lie side by side, so that their planes do.
      way.kind === 'nodes' ? spectrum.push(point) - 1 : place(point),
    );
    const wanted = originFrequencies(band);
    const interpolatesOrigins = way.kind === 'nodes' && wanted.length > mostOwnOrigins;
    const ownOrigins = interpolatesOrigins ? [] : wanted.map((frequencyHz) => ({ frequencyHz, point: place({ frequencyHz, centreHz: frequencyHz }) }));
    return { band, way, points, ownOrigins, interpolatesOrigins };
  });
  const origins = [...new Set(places.flatMap(({ ownOrigins, interpolatesOrigins, points }) => [...ownOrigins.map(({ point }) => point), ...(interpolatesOrigins ? points : [])]))];
  return { spectrum, places, origins };
}

/** Planes of points that lie side by side: a view, not a copy. */
function planesAt(planes: Float64Array, points: readonly number[], pixels: number): Float64Array {
  return planes.subarray(points[0] * pixels, (points[0] + points.length) * pixels);
}

/** Channels as means over a plan's frequencies, which stand at `points` in the spectrum followed. */
function directBasis({ channels }: BandPlan, points: readonly number[], rays: RayResult, pixels: number): ChannelBasis {
  const placed = channels.map((channel) => ({ ...channel, points: channel.points.map((own) => points[own]) }));
  const { I, Q, U } = bandCube({ channels: placed }, rays, pixels);
  return { I: { planes: I }, Q: { planes: Q }, U: { planes: U } };
}

/** A band's heights of origin at frequencies of its own. */
function ownHeights({ band, ownOrigins }: BandPlace, rays: RayResult, origins: readonly number[], pixels: number): OriginHeights {
  const heights = ownOrigins.map(({ point }) => origins.indexOf(point));
  const [atPoints, atOrigins] = [ownOrigins.map(({ point }) => point), heights].map((from) => (planes: Float64Array): Float64Array => {
    const some = new Float64Array(from.length * pixels);
    from.forEach((plane, k) => some.set(planes.subarray(plane * pixels, (plane + 1) * pixels), k * pixels));
    return some;
  });
  const moments = { Q: atPoints(rays.Q), U: atPoints(rays.U), heightQ: atOrigins(rays.heightQ), heightU: atOrigins(rays.heightU), emittedP: atOrigins(rays.emittedP) };
  return { band: band.name, frequenciesHz: ownOrigins.map(({ frequencyHz }) => frequencyHz), heightKpc: originHeights(moments) };
}

/** Moments at a band's nodes where its heights of origin are interpolated. */
function momentsAt({ points, interpolatesOrigins }: BandPlace, rays: RayResult, origins: readonly number[], pixels: number): Pick<BandValues, 'moments'> {
  if (!interpolatesOrigins) return {};
  const first = origins.indexOf(points[0]);
  const side = points.map((_, k) => first + k);
  return { moments: { heightQ: planesAt(rays.heightQ, side, pixels), heightU: planesAt(rays.heightU, side, pixels), emittedP: planesAt(rays.emittedP, side, pixels) } };
}
