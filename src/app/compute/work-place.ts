import type { RayBackend } from '../../ray/job.ts';
import { followSightline, type Sightline } from '../../ray/sightline.ts';
import { wavelengthSquared } from '../../ray/synchrotron.ts';
import type { Scene } from '../../scene/types.ts';

/** One place of a galaxy, before the beam: what lies along the sight and what comes of it. */
export interface PlacePicture {
  readonly northKpc: number;
  readonly eastKpc: number;
  /** Undefined where the line of sight misses the galaxy. */
  readonly sightline?: Sightline;
  /** Over wavelengths, longest band to shortest and a little beyond. */
  readonly spectrum: { readonly squareM2: Float64Array; readonly I: Float64Array; readonly Q: Float64Array; readonly U: Float64Array };
  /** The true Faraday spectrum at the longest wavelength: polarized emission by the depth it lies at. */
  readonly depths: { readonly depth: Float64Array; readonly P: Float64Array };
}

const wavelengths = 96;
const depthBins = 61;

/** Follows one ray closely; the foreground is left out. */
export async function workPlace(scene: Scene, northKpc: number, eastKpc: number, backend: RayBackend, signal: AbortSignal): Promise<PlacePicture> {
  const centres = scene.observation.bands.map((band) => band.centreHz ?? band.channels[band.channels.length >> 1].frequencyHz).sort((a, b) => a - b);
  const point = (frequencyHz: number): { readonly frequencyHz: number; readonly centreHz: number } => ({ frequencyHz, centreHz: frequencyHz });
  const sightline = followSightline(scene, northKpc, eastKpc, centres.map(point));
  const [longest, shortest] = [1.15 * wavelengthSquared(centres[0]), 0.85 * wavelengthSquared(centres[centres.length - 1])];
  const squareM2 = Float64Array.from({ length: wavelengths }, (_, k) => shortest + ((longest - shortest) * k) / (wavelengths - 1));
  const light = wavelengthSquared(1);
  const spectrum = Array.from(squareM2, (square) => point(Math.sqrt(light / square)));
  const bundle = { northKpc: Float64Array.of(northKpc), eastKpc: Float64Array.of(eastKpc) };
  const { I, Q, U } = await backend({ scene, spectrum, bundle, origins: false }, { signal });
  return { northKpc, eastKpc, ...(sightline && { sightline }), spectrum: { squareM2, I, Q, U }, depths: depthsOf(sightline) };
}

/** Sorts the emission of the longest wavelength into depths. */
function depthsOf(sightline: Sightline | undefined): PlacePicture['depths'] {
  if (!sightline) return { depth: new Float64Array(0), P: new Float64Array(0) };
  const { depth, light } = sightline;
  const [low, high] = [Math.min(0, ...depth), Math.max(0, ...depth)];
  const room = Math.max(0.08 * (high - low), 0.5);
  const width = (high - low + 2 * room) / depthBins;
  const [q, u] = [new Float64Array(depthBins), new Float64Array(depthBins)];
  const [bottom, last] = [low - room, depth.length - 1];
  for (let k = 0; k <= last; k++) {
    // A piece spreads evenly over the depths between its neighbours.
    const [from, to] = [(depth[Math.max(0, k - 1)] + depth[k]) / 2, (depth[k] + depth[Math.min(last, k + 1)]) / 2];
    const [a, b] = [(Math.min(from, to) - bottom) / width, (Math.max(from, to) - bottom) / width];
    for (let bin = Math.floor(a); bin <= Math.min(depthBins - 1, Math.floor(b)); bin++) {
      const part = b > a ? (Math.min(b, bin + 1) - Math.max(a, bin)) / (b - a) : 1;
      q[bin] += part * light[0].Q[k];
      u[bin] += part * light[0].U[k];
    }
  }
  return {
    depth: q.map((_, bin) => low - room + (bin + 0.5) * width),
    P: q.map((value, bin) => Math.hypot(value, u[bin]) / width),
  };
}
