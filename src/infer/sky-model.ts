import type { RayBackend } from '../ray/job.ts';
import type { Band, Scene } from '../scene/types.ts';
import { scenePath } from '../scene/paths.ts';
import { beamConvolver, beamReach, beamSolidAngleSr, pixelBeam } from '../sky/beam.ts';
import { foregroundDepths, largestForeground, turnByForeground } from '../sky/foreground.ts';
import { cropPlanes, offsetsKpc } from '../sky/grid.ts';
import { bandCube } from '../sky/observe.ts';
import { missingBeam } from '../sky/short-spacings.ts';
import { planSpectrum, type SpectralPlan } from '../sky/spectral-plan.ts';
import type { CelestialWcs } from '../sky/wcs-types.ts';
import type { ForwardModel } from './forward.ts';
import type { DataSet, StokesQuantity } from './types.ts';

/** Where parameters lead elsewhere than a hypothesis's start, depths may be larger by this factor. */
const depthReserve = 3;
/** The few rays through a nearly singular centre, blended by the beam, do not decide how finely channels are averaged. */
const depthQuantile = 0.98;

/** A scene with values set at paths; `values` in the units of the paths. */
export function sceneWith(scene: Scene, paths: readonly string[], values: ArrayLike<number>): Scene {
  return paths.reduce((changed, path, k) => scenePath(changed, path).set(changed, values[k]), scene);
}

/**
 * The maps that a scene would give on a data set's grid, beam by beam: the model is brought to the
 * data, never the reverse. Rays are followed beyond the image as far as the widest beam reaches.
 */
export function makeSkyModel(data: DataSet, start: Scene, paths: readonly string[], backend: RayBackend): ForwardModel {
  const frame = widenedFrame(data, start.observation.missingWavelengths);
  const bands = data.bands.map((band): Band => ({ name: band.name, channels: band.channels }));
  const plan = planSpectrum(start, raysOf(start, frame), bands, {
    depthReserve,
    foreground: largestForeground(foregroundDepths(start, frame.wcs, frame.nx, frame.ny)),
    origins: false,
  });
  return async (values, signal) => {
    const scene = sceneWith(start, paths, values);
    const bundle = raysOf(scene, frame);
    const rays = await backend({ scene, spectrum: plan.spectrum, bundle }, { signal });
    const depth = foregroundDepths(scene, frame.wcs, frame.nx, frame.ny);
    if (depth !== 0) turnByForeground(rays.Q, rays.U, plan.spectrum.map((point) => point.frequencyHz), depth);
    const maps = plan.bands.map((_, band) => bandMaps(data, frame, plan, band, rays, scene.observation.missingWavelengths));
    return data.planes.map((plane) => {
      const pixels = data.axes.nx * data.axes.ny;
      return maps[plane.band][plane.quantity].subarray(plane.channel * pixels, (plane.channel + 1) * pixels);
    });
  };
}

/** A data set's image, grown so that its widest beam sees all that it should. */
interface Frame {
  readonly nx: number;
  readonly ny: number;
  readonly margin: number;
  readonly wcs: CelestialWcs;
}

function widenedFrame({ axes, bands }: DataSet, missingWavelengths: number | undefined): Frame {
  const reaches = bands.flatMap(({ beam }) => (beam ? Object.values(beamReach(pixelBeam(beam, axes.wcs.cd))) : []));
  const beyond = missingWavelengths === undefined ? [] : Object.values(beamReach(pixelBeam(missingBeam(missingWavelengths), axes.wcs.cd)));
  const margin = Math.max(0, ...reaches) + Math.max(0, ...beyond);
  const wcs = { ...axes.wcs, crpixX: axes.wcs.crpixX + margin, crpixY: axes.wcs.crpixY + margin };
  return { nx: axes.nx + 2 * margin, ny: axes.ny + 2 * margin, margin, wcs };
}

/** Rays through the pixels; those where the projection has no sky pass the galaxy by. */
function raysOf(scene: Scene, { wcs, nx, ny }: Frame): ReturnType<typeof offsetsKpc> {
  const { distanceKpc, centre } = scene.galaxy;
  const outside = 1e3 * (scene.galaxy.volume.radiusKpc + scene.galaxy.volume.heightKpc);
  const known = (value: number): number => (Number.isFinite(value) ? value : outside);
  const bundle = offsetsKpc(wcs, nx, ny, distanceKpc, centre ?? { raDeg: 0, decDeg: 0 });
  return { northKpc: bundle.northKpc.map(known), eastKpc: bundle.eastKpc.map(known) };
}

/** One band's I, Q and U on the data's pixels, in the data's unit. */
function bandMaps(
  data: DataSet,
  frame: Frame,
  plan: SpectralPlan,
  index: number,
  rays: Parameters<typeof bandCube>[1],
  missingWavelengths: number | undefined,
): Readonly<Record<StokesQuantity, Float64Array>> {
  const { nx, ny, margin, wcs } = frame;
  const { beam } = data.bands[index];
  const cube = bandCube(plan.bands[index], rays, nx * ny);
  if (beam) {
    const convolve = beamConvolver(pixelBeam(beam, wcs.cd), nx, ny);
    const perBeam = data.unit === 'Jy/beam' ? beamSolidAngleSr(beam) : 1;
    for (let start = 0; start < cube.I.length; start += nx * ny) {
      const plane = (stokes: Float64Array): Float64Array => stokes.subarray(start, start + nx * ny);
      convolve(plane(cube.Q), plane(cube.U));
      convolve(plane(cube.I));
    }
    for (const stokes of [cube.I, cube.Q, cube.U]) for (let k = 0; k < stokes.length; k++) stokes[k] *= perBeam;
  }
  if (missingWavelengths !== undefined) {
    const smooth = beamConvolver(pixelBeam(missingBeam(missingWavelengths), wcs.cd), nx, ny);
    for (const stokes of [cube.I, cube.Q, cube.U]) {
      for (let start = 0; start < stokes.length; start += nx * ny) {
        const broad = stokes.slice(start, start + nx * ny);
        smooth(broad);
        for (let k = 0; k < broad.length; k++) stokes[start + k] -= broad[k];
      }
    }
  }
  const crop = (stokes: Float64Array): Float64Array => cropPlanes(stokes, nx, ny, margin);
  return { I: crop(cube.I), Q: crop(cube.Q), U: crop(cube.U) };
}
