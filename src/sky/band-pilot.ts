import type { RayBackend } from '../ray/job.ts';
import { pickRays, typicalLargest } from '../ray/trace.ts';
import type { RayBundle, RayResult } from '../ray/types.ts';
import type { Band, Scene } from '../scene/types.ts';
import { toCoefficients, coefficientReader } from './band-coefficients.ts';
import { makeBandNodes, spectrumAt, type BandNodes } from './band-nodes.ts';
import { degreesNeeded, interpolationError, isNegligible, type BandScale } from './band-tails.ts';
import { faintness } from './faint-rays.ts';
import { turnByForeground } from './foreground.ts';

/** How a band's channels are had from nodes: found on a few rays, good for most. */
export interface Interpolation {
  readonly nodes: BandNodes;
  /** Degrees that would do for every ray of the pilot's. */
  readonly mostDegrees: number;
  readonly scale: BandScale;
  /** Whether Stokes I follows the spectrum and nothing else, so that one node tells it. */
  readonly isPlainI: boolean;
}

/** Rays that a pilot follows, and an even choice over them. */
export interface Pilot {
  readonly bundle: RayBundle;
  /** Foreground's depth, of all of them or ray by ray. */
  readonly foreground: number | Float64Array;
}

const firstDegrees = 17;
/** Rays, such as those through a singular centre, that are followed again at more nodes cost this many frequencies besides. */
const againCost = 20;
/** Nor may they be more than this share: their planes are kept for all. */
const mostAgain = 0.05;
/** Rounding of the sums of a ray. */
const plainError = 1e-12;

/** Rays of a bundle for the pilot, evenly picked. */
export function pickPilot({ northKpc, eastKpc }: RayBundle, foreground: number | Float64Array): Pilot {
  const picked = pickRays(northKpc.length);
  const at = (values: Float64Array): Float64Array => Float64Array.from(picked, (index) => values[index]);
  return { bundle: { northKpc: at(northKpc), eastKpc: at(eastKpc) }, foreground: typeof foreground === 'number' ? foreground : at(foreground) };
}

/**
 * How many nodes a band of a scene needs, from the coefficients of the pilot's rays; undefined
 * where `mostDegrees` would not do.
 */
export async function pilotBand(scene: Scene, band: Band, pilot: Pilot, mostDegrees: number, backend: RayBackend, signal?: AbortSignal): Promise<Interpolation | undefined> {
  const { tolerance } = scene.numerics;
  const offsets = centresNeeded(scene, band, tolerance);
  const rays = pilot.bundle.northKpc.length;
  for (let degrees = firstDegrees; ; degrees = 2 * degrees - 1) {
    const nodes = makeBandNodes(band.channels, degrees, offsets);
    const seen = await backend({ scene, spectrum: nodes.spectrum, bundle: pilot.bundle, origins: false }, { signal });
    turnByForeground(seen.Q, seen.U, nodes.spectrum.map(({ frequencyHz }) => frequencyHz), pilot.foreground);
    const scale = bandScale(seen, spectrumAt(scene.cosmicRays.index, nodes.spectrum), rays);
    if (!scale) return undefined;
    const isPlainI = followsSpectrum(seen.I, spectrumAt(scene.cosmicRays.index, nodes.spectrum), rays);
    const shares = faintness({ I: seen.I.subarray(0, rays) });
    for (const planes of [seen.I, seen.Q, seen.U]) toCoefficients(planes, nodes, scene.cosmicRays.index);
    const read = coefficientReader(seen, rays);
    const needs = Array.from({ length: rays }, (_, ray) => {
      const coefficients = read(ray);
      const isKnown = isNegligible(interpolationError(coefficients, degrees, offsets, scale, shares[ray]), tolerance);
      return isKnown ? degreesNeeded(coefficients, degrees, offsets, scale, tolerance * shares[ray]) : Infinity;
    }).sort((a, b) => a - b);
    const largest = needs[rays - 1];
    if (largest < Infinity) {
      const chosen = cheapestDegrees(needs);
      return chosen <= mostDegrees ? { nodes: makeBandNodes(band.channels, chosen, offsets), mostDegrees: largest, scale, isPlainI } : undefined;
    }
    if (degrees > mostDegrees) return undefined;
  }
}

/** The number of degrees that costs least, with those rays followed again that need more; `needs` in rising order. */
function cheapestDegrees(needs: readonly number[]): number {
  const rays = needs.length;
  const cost = (chosen: number): number => {
    let again = 0;
    for (const need of needs) for (let degrees = chosen; degrees < need; again += degrees + againCost) degrees = moreDegrees(degrees);
    return chosen + again / rays;
  };
  const few = needs.slice(Math.floor((1 - mostAgain) * rays));
  return few.reduce((best, degrees) => (cost(degrees) < cost(best) ? degrees : best));
}

/** From one round to the next, degrees for rays that had too few. */
export function moreDegrees(degrees: number): number {
  return Math.ceil(1.6 * degrees) + 2;
}

/**
 * How many centres to take where layers depend on frequency: ln h changes by at most `heightIndex`
 * times half a channel over its centre's frequency, and emission, smooth in ln h, by no more than that.
 */
function centresNeeded({ cosmicRays }: Scene, { channels }: Band, tolerance: number): number {
  const steepest = Math.max(0, ...cosmicRays.layers.map(({ heightIndex }) => Math.abs(heightIndex ?? 0)));
  const reach = steepest * Math.max(...channels.map(({ frequencyHz, widthHz }) => widthHz / 2 / (frequencyHz - widthHz / 2)));
  if (reach === 0) return 1;
  let count = 1;
  // Interpolation at Chebyshev points: 2 (reach/2)^n times the derivative over n!; 10 covers its rise and the sharpening by depolarization.
  while (2 * (reach / 2) ** count * 10 > 0.02 * tolerance && count < 8) count++;
  return count;
}

/** The scale of a band, over the spectrum: that of its most depolarized node, for every channel needs the same coefficients. */
function bandScale({ I, Q, U }: RayResult, factors: Float64Array, rays: number): BandScale | undefined {
  let [scaleI, scaleP] = [Infinity, Infinity];
  factors.forEach((factor, node) => {
    const own = (planes: Float64Array): Float64Array => planes.subarray(node * rays, (node + 1) * rays).map((value) => value / factor);
    const [q, u] = [own(Q), own(U)];
    const largestI = typicalLargest([...own(I)]);
    scaleI = Math.min(scaleI, largestI);
    scaleP = Math.min(scaleP, Math.max(1e-3 * largestI, typicalLargest([...q].map((value, k) => Math.hypot(value, u[k])))));
  });
  return scaleI > 0 ? { I: scaleI, P: scaleP } : undefined;
}

function followsSpectrum(I: Float64Array, factors: Float64Array, rays: number): boolean {
  for (let node = 1; node < factors.length; node++) {
    for (let ray = 0; ray < rays; ray++) {
      const [first, own] = [I[ray] / factors[0], I[node * rays + ray] / factors[node]];
      if (!(Math.abs(own - first) <= plainError * first)) return false;
    }
  }
  return true;
}
