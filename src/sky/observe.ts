import type { RayBackend, Watch } from '../ray/job.ts';
import type { Scene } from '../scene/types.ts';
import { beamMargin, beamPlanes } from './beam.ts';
import { channelMaker, type BasisPlanes, type ChannelBasis } from './channel-basis.ts';
import { foregroundDepths } from './foreground.ts';
import { chooseWays, followBands, type BandWay } from './follow-bands.ts';
import { cropPlanes, gridFromScene, gridOffsetsKpc, growGrid, wcsFromGrid } from './grid.ts';
import { imageStride } from './image-stride.ts';
import { refuseTooLarge } from './memory.ts';
import { noiseAdder } from './noise.ts';
import type { OriginHeights } from './origin-heights.ts';
import { highPassPlanes, missingBeam } from './short-spacings.ts';
import type { SkyGrid, StokesCube } from './types.ts';

/** A scene as a telescope sees it, its channels made as they are asked for, with how exact the rays were. */
export interface SeenSky {
  readonly grid: SkyGrid;
  readonly bands: readonly SeenBand[];
  /** Total Faraday depth of each pixel's ray, foreground included, rad m^-2. */
  readonly faradayDepth: Float64Array;
  /** What of it is foreground: one number, or one per pixel. */
  readonly foreground: number | Float64Array;
  readonly origins: readonly OriginHeights[];
  /** Largest estimated error on the scale that `tolerance` bounds. */
  readonly errorReached: number;
  /** Pixels looked at, those of the beam's margin included. */
  readonly rays: number;
  /** Of those, rays that were followed; the others are interpolated to the tolerance. */
  readonly raysFollowed: number;
  /** Samples over rays followed; rays that were followed again on a finer scale have both. */
  readonly samplesPerRay: number;
}

/** One band of it: a cube, but for its planes, which need not all be in memory at once. */
export interface SeenBand extends Omit<StokesCube, 'I' | 'Q' | 'U'> {
  /** Channels `from` to `to` (not included), noise included, [(channel - from) * pixels + pixel]: always the same ones. */
  planes(from: number, to: number): Pick<StokesCube, 'I' | 'Q' | 'U'>;
}

/** A scene as a telescope sees it, whole. */
export interface ObservedSky extends Omit<SeenSky, 'bands'> {
  readonly cubes: readonly StokesCube[];
}

/** Share of the tolerance that terms left out of a pixel may come to, beside its largest: sharpened for channels far more depolarized than others. */
const leftOut = 1e-3;

/** Everything of `lookAt` with its cubes in memory. */
export async function observe(scene: Scene, backend: RayBackend, watch: Watch = {}): Promise<ObservedSky> {
  const { bands, ...sky } = await lookAt(scene, backend, watch);
  return { ...sky, cubes: bands.map(wholeCube) };
}

/** All channels of a band. */
export function wholeCube({ planes, ...about }: SeenBand): StokesCube {
  return { ...about, ...planes(0, about.channels.length) };
}

/**
 * Rays → foreground screen → channel averages → beam → missing short spacings → noise, in that order
 * (physics.md section 5), for every band of a scene. What is linear is done to the few planes that
 * channels are made of. Throws InputError where the image would not fit into memory.
 */
export async function lookAt(scene: Scene, backend: RayBackend, watch: Watch = {}): Promise<SeenSky> {
  const grid = gridFromScene(scene);
  const { beam, bands, missingWavelengths } = scene.observation;
  const margin = beamMargin(beam, grid) + (missingWavelengths === undefined ? 0 : beamMargin(missingBeam(missingWavelengths), grid));
  const wide = growGrid(grid, margin);
  const size = { nx: grid.nx, ny: grid.ny, margin };
  refuseTooLarge({ ...size, channels: 0, frequencies: bands.length });
  const bundle = gridOffsetsKpc(wide);
  const foreground = foregroundDepths(scene, wcsFromGrid(wide), wide.nx, wide.ny);
  const ways = await chooseWays(scene, bundle, bands, foreground, backend, watch);
  refuseTooLarge({ ...size, ...planesOf(ways) });
  const lattice = { nx: wide.nx, ny: wide.ny, stride: imageStride(scene, wide) };
  const followed = await followBands(scene, bundle, bands, foreground, ways, backend, watch, lattice);
  const cropped = (planes: Float64Array): Float64Array => cropPlanes(planes, wide.nx, wide.ny, margin);
  const depth = followed.faradayDepth.map((value, k) => value + (typeof foreground === 'number' ? foreground : foreground[k]));
  return {
    grid,
    bands: bands.map(({ name, channels, noise }, k) => {
      const { I, Q, U } = followed.bases[k];
      const planes = { I: I.planes, Q: Q.planes, U: U.planes };
      if (beam) beamPlanes(planes, beam, wide);
      if (missingWavelengths !== undefined) highPassPlanes(planes, missingWavelengths, wide);
      const inner = (stokes: BasisPlanes): BasisPlanes => ({ ...stokes, planes: cropped(stokes.planes) });
      const about = { band: name, grid, channels, unit: beam ? ('Jy/beam' as const) : ('Jy/sr' as const), ...(beam && { beam }) };
      return seenBand(about, { I: inner(I), Q: inner(Q), U: inner(U) }, noise ?? scene.observation.noise ?? 0, scene.numerics);
    }),
    faradayDepth: cropped(depth),
    foreground: typeof foreground === 'number' ? foreground : cropped(foreground),
    origins: followed.origins.map((origin) => ({ ...origin, heightKpc: cropped(origin.heightKpc) })),
    errorReached: followed.error,
    rays: bundle.northKpc.length,
    raysFollowed: followed.followed,
    samplesPerRay: followed.samples / followed.followed,
  };
}

function planesOf(ways: readonly BandWay[]): { channels: number; frequencies: number } {
  let [channels, frequencies] = [0, 0];
  for (const way of ways) {
    frequencies += (way.kind === 'direct' ? way.plan : way.interpolation.nodes).spectrum.length;
    if (way.kind === 'direct') channels += way.plan.bands[0].channels.length;
  }
  return { channels, frequencies };
}

function seenBand(about: Omit<SeenBand, 'noise' | 'planes'>, basis: ChannelBasis, rms: number, { tolerance, seed }: Scene['numerics']): SeenBand {
  const pixels = about.grid.nx * about.grid.ny;
  const makers = [basis.I, basis.Q, basis.U].map((planes) => channelMaker(planes, pixels, leftOut * tolerance));
  const addNoise = rms > 0 ? noiseAdder(about, rms, seed) : undefined;
  return {
    ...about,
    noise: new Float64Array(about.channels.length).fill(rms),
    planes: (from, to) => {
      const [I, Q, U] = makers.map((make) => make(from, to));
      addNoise?.({ I, Q, U }, from);
      return { I, Q, U };
    },
  };
}
