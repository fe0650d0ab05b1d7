import { InputError } from '../units/input-error.ts';
import { goodSize } from '../math/fft.ts';
import { randomStream } from '../math/random.ts';
import type { Observation, Scene } from '../scene/types.ts';
import { beamReach, pixelBeam } from './beam.ts';
import { arcsec, offsetsKpc } from './grid.ts';
import { noiseMaker } from './noise.ts';
import { lambda2M2 } from './wavelength.ts';
import type { CelestialWcs } from './wcs-types.ts';

/**
 * Turns Q and U in place by e^{2 i lambda^2 RM}, as a Faraday screen in front of the galaxy does.
 * Planes are [frequency * pixels + pixel]; the depth is one number or one per pixel, rad m^-2.
 * Source: Burn 1966.
 */
export function turnByForeground(
  Q: Float64Array,
  U: Float64Array,
  frequenciesHz: ArrayLike<number>,
  depth: number | Float64Array,
): void {
  if (depth === 0) return;
  const pixels = Q.length / frequenciesHz.length;
  for (let channel = 0, k = 0; channel < frequenciesHz.length; channel++) {
    const lambda2 = lambda2M2(frequenciesHz[channel]);
    for (let pixel = 0; pixel < pixels; pixel++, k++) {
      const angle = 2 * lambda2 * (typeof depth === 'number' ? depth : depth[pixel]);
      const [cos, sin] = [Math.cos(angle), Math.sin(angle)];
      [Q[k], U[k]] = [Q[k] * cos - U[k] * sin, Q[k] * sin + U[k] * cos];
    }
  }
}

/**
 * The depth of a scene's foreground, rad m^-2: one number where it is constant, else one per pixel of
 * a map [row * nx + column]: constant, gradient (0 at the galaxy's centre) and random screen added.
 * The screen is one realisation per (seed, map size). Throws InputError where its scale is finer than a
 * pixel, or too coarse to be drawn.
 */
export function foregroundDepths(scene: Scene, wcs: CelestialWcs, nx: number, ny: number): number | Float64Array {
  const { foregroundDepth, foregroundGradient, foregroundScreen } = scene.observation;
  if (!foregroundGradient && !foregroundScreen) return foregroundDepth;
  const depths = new Float64Array(nx * ny).fill(foregroundDepth);
  if (foregroundGradient) {
    const { northKpc: north, eastKpc: east } = offsetsKpc(wcs, nx, ny, 1 / arcsec, scene.galaxy.centre);
    const { radM2PerArcsec, angle } = foregroundGradient;
    const [cos, sin] = [Math.cos(angle), Math.sin(angle)];
    depths.forEach((_, k) => {
      const along = north[k] * cos + east[k] * sin;
      if (Number.isFinite(along)) depths[k] += radM2PerArcsec * along;
    });
  }
  if (foregroundScreen) {
    const screen = randomScreen(foregroundScreen, wcs, nx, ny, scene.numerics.seed);
    depths.forEach((_, k) => (depths[k] += screen[k]));
  }
  return depths;
}

/** The largest |depth| of a foreground. */
export function largestForeground(depth: number | Float64Array): number {
  return typeof depth === 'number' ? Math.abs(depth) : depth.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
}

/** Sides of the periodic plane on which a screen is drawn. */
const mostSamples = 4096;

/** A Gaussian screen with autocorrelation rms^2 exp(-(d/scale)^2), which is a beam's of FWHM 2 sqrt(ln 2) scale. */
function randomScreen(
  { rmsRadM2, scaleArcsec }: NonNullable<Observation['foregroundScreen']>,
  wcs: CelestialWcs,
  nx: number,
  ny: number,
  seed: number,
): Float64Array {
  const fwhm = 2 * Math.sqrt(Math.LN2) * scaleArcsec;
  const pixelArcsec = 3600 * Math.sqrt(Math.abs(wcs.cd[0] * wcs.cd[3] - wcs.cd[1] * wcs.cd[2]));
  if (fwhm < pixelArcsec) {
    throw new InputError(
      `the random foreground has a scale of ${scaleArcsec} arcsec on pixels of ${Number(pixelArcsec.toPrecision(6))} arcsec; ` +
        'a screen is resolved: take smaller pixels or a scale of at least 0.6 pixels',
    );
  }
  const shape = pixelBeam({ majorArcsec: fwhm, minorArcsec: fwhm, angle: 0 }, wcs.cd);
  const reach = beamReach(shape);
  const samples = Math.max(...[goodSize(Math.max(nx + reach.x, 2 * reach.x)), goodSize(Math.max(ny + reach.y, 2 * reach.y))]);
  if (samples > mostSamples) {
    throw new InputError(
      `the random foreground has a scale of ${scaleArcsec} arcsec, ${Math.round(scaleArcsec / pixelArcsec)} pixels of a ${nx} x ${ny} map ` +
        `(with its margin): a screen that coarse cannot be drawn; take a smaller scale, larger pixels, or a gradient`,
    );
  }
  const draw = noiseMaker(nx, ny, shape);
  return draw(randomStream(seed, 'foreground').gaussian).map((value) => rmsRadM2 * value);
}
