import type { RayBackend, Watch } from '../ray/job.ts';
import type { RayResult } from '../ray/types.ts';
import type { Scene } from '../scene/types.ts';
import { applyBeam, beamMargin } from './beam.ts';
import { foregroundDepths, largestForeground, turnByForeground } from './foreground.ts';
import { traceFaintToo } from './faint-rays.ts';
import { cropCube, cropPlanes, gridFromScene, gridOffsetsKpc, growGrid, wcsFromGrid } from './grid.ts';
import { refuseTooLarge } from './memory.ts';
import { addNoise } from './noise.ts';
import { missingBeam, removeShortSpacings } from './short-spacings.ts';
import { planSpectrum, type BandPlan, type SpectralPlan } from './spectral-plan.ts';
import type { SkyGrid, StokesCube } from './types.ts';

/** Heights of origin (kpc) of one band: [frequency][row * nx + column], NaN where there is no origin. */
export interface OriginHeights {
  readonly band: string;
  readonly frequenciesHz: readonly number[];
  readonly heightKpc: Float64Array;
}

/** A scene as a telescope sees it, with how exact the rays were. */
export interface ObservedSky {
  readonly grid: SkyGrid;
  readonly cubes: readonly StokesCube[];
  /** Total Faraday depth of each pixel's ray, foreground included, rad m^-2. */
  readonly faradayDepth: Float64Array;
  readonly origins: readonly OriginHeights[];
  /** Largest estimated error on the scale that `tolerance` bounds. */
  readonly errorReached: number;
  readonly rays: number;
  readonly samplesPerRay: number;
}

/** |P| below this part of what was emitted has no height of origin (physics.md section 5). */
const smallestShare = 1e-2;

/**
 * Rays → foreground screen → channel averages → beam → missing short spacings → noise, in that order
 * (physics.md section 5), for every band of a scene. Throws InputError where the image would not fit into memory.
 */
export async function observe(scene: Scene, backend: RayBackend, watch: Watch = {}): Promise<ObservedSky> {
  const grid = gridFromScene(scene);
  const { beam, bands, missingWavelengths } = scene.observation;
  const margin = beamMargin(beam, grid) + (missingWavelengths === undefined ? 0 : beamMargin(missingBeam(missingWavelengths), grid));
  const wide = growGrid(grid, margin);
  const channels = bands.reduce((sum, band) => sum + band.channels.length, 0);
  const size = { nx: grid.nx, ny: grid.ny, margin, channels };
  refuseTooLarge({ ...size, frequencies: channels });
  const bundle = gridOffsetsKpc(wide);
  const foreground = foregroundDepths(scene, wcsFromGrid(wide), wide.nx, wide.ny);
  const plan = planSpectrum(scene, bundle, bands, { foreground: largestForeground(foreground) });
  refuseTooLarge({ ...size, frequencies: plan.spectrum.length });
  const rays = await traceFaintToo(backend, { scene, spectrum: plan.spectrum, bundle }, watch);
  turnScreen(foreground, plan, rays);
  const cubes = plan.bands.map((band) => {
    const sharp: StokesCube = {
      ...bandCube(band, rays, wide.nx * wide.ny),
      band: band.band.name,
      grid: wide,
      channels: band.channels.map(({ channel }) => channel),
      unit: 'Jy/sr',
      noise: new Float64Array(band.channels.length),
    };
    const beamed = beam ? applyBeam(sharp, beam) : sharp;
    const seen = cropCube(missingWavelengths === undefined ? beamed : removeShortSpacings(beamed, missingWavelengths), margin);
    const noise = band.band.noise ?? scene.observation.noise;
    return noise ? addNoise(seen, noise, scene.numerics.seed) : seen;
  });
  const depth = rays.faradayDepth.map((value, k) => value + (typeof foreground === 'number' ? foreground : foreground[k]));
  const cropped = (planes: Float64Array): Float64Array => cropPlanes(planes, wide.nx, wide.ny, margin);
  return {
    grid,
    cubes,
    faradayDepth: cropped(depth),
    origins: plan.bands.map((band) => originHeights(band, rays, cropped)),
    errorReached: rays.error.reduce((a, b) => Math.max(a, b), 0),
    rays: bundle.northKpc.length,
    samplesPerRay: rays.samples / bundle.northKpc.length,
  };
}

/** Turns Q and U of every frequency by the foreground's depth, before any average. */
function turnScreen(depth: number | Float64Array, plan: SpectralPlan, rays: RayResult): void {
  if (depth === 0) return;
  const frequenciesHz = plan.spectrum.map((point) => point.frequencyHz);
  turnByForeground(rays.Q, rays.U, frequenciesHz, depth);
  turnByForeground(rays.heightQ, rays.heightU, frequenciesHz, depth);
}

/** The channels of a band, [channel * pixels + pixel], as means over their frequencies, Jy/sr. */
export function bandCube(plan: BandPlan, rays: Pick<RayResult, 'I' | 'Q' | 'U'>, pixels: number): Pick<StokesCube, 'I' | 'Q' | 'U'> {
  const mean = (planes: Float64Array): Float64Array => {
    const cube = new Float64Array(plan.channels.length * pixels);
    plan.channels.forEach(({ points, weights }, channel) => {
      points.forEach((point, k) => {
        for (let pixel = 0; pixel < pixels; pixel++) cube[channel * pixels + pixel] += weights[k] * planes[point * pixels + pixel];
      });
    });
    return cube;
  };
  return { I: mean(rays.I), Q: mean(rays.Q), U: mean(rays.U) };
}

/** ∫z w ds / ∫w ds of each ray, w its net share of what is seen (physics.md section 5, own definition). */
function originHeights(plan: BandPlan, rays: RayResult, crop: (planes: Float64Array) => Float64Array): OriginHeights {
  const pixels = rays.faradayDepth.length;
  const heights = new Float64Array(plan.origins.length * pixels);
  plan.origins.forEach(({ point }, k) => {
    for (let pixel = 0; pixel < pixels; pixel++) {
      const at = point * pixels + pixel;
      const [q, u] = [rays.Q[at], rays.U[at]];
      const square = q * q + u * u;
      const seen = square > 0 && Math.sqrt(square) >= smallestShare * rays.emittedP[at];
      heights[k * pixels + pixel] = seen ? (rays.heightQ[at] * q + rays.heightU[at] * u) / square : NaN;
    }
  });
  return { band: plan.band.name, frequenciesHz: plan.origins.map((origin) => origin.frequencyHz), heightKpc: crop(heights) };
}
