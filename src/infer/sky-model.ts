import type { RayBackend } from '../ray/job.ts';
import type { Band, Scene } from '../scene/types.ts';
import { beamConvolver, beamReach, beamSolidAngleSr, pixelBeam } from '../sky/beam.ts';
import { bandCube } from '../sky/channel-means.ts';
import { foregroundDepths, largestForeground, turnByForeground } from '../sky/foreground.ts';
import { cropPlanes, offsetsKpc } from '../sky/grid.ts';
import { missingBeam } from '../sky/short-spacings.ts';
import { planSpectrum } from '../sky/spectral-plan.ts';
import type { RayBundle } from '../ray/types.ts';
import type { CelestialWcs } from '../sky/wcs-types.ts';
import type { ForwardModel, ModelSlopes } from './forward.ts';
import type { SceneOf } from './scene-of.ts';
import { sceneSlopes } from './scene-slopes.ts';
import { addTurning, combineTangents, depthSlope, type StokesPlanes } from './sky-slopes.ts';
import type { DataSet } from './types.ts';

/** Where parameters lead elsewhere than a hypothesis's start, depths may be larger by this factor. */
const depthReserve = 3;
/** The few rays through a nearly singular centre, blended by the beam, do not decide how finely channels are averaged. */
const depthQuantile = 0.98;

/**
 * The maps that a scene would give on a data set's grid, beam by beam: the model is brought to the
 * data, never the reverse. Rays are followed beyond the image as far as the widest beam reaches. Its
 * slopes are derivatives of the rays, seen by the same telescope: all on the way is linear in I, Q and U.
 */
export function makeSkyModel(data: DataSet, start: Scene, sceneOf: SceneOf, backend: RayBackend): ForwardModel {
  const frame = widenedFrame(data, start.observation.missingWavelengths);
  const bands = data.bands.map((band): Band => ({ name: band.name, channels: band.channels }));
  const plan = planSpectrum(start, raysOf(start, frame), bands, {
    depthReserve,
    depthQuantile,
    foreground: largestForeground(foregroundDepths(start, frame.wcs, frame.nx, frame.ny)),
    origins: false,
  });
  const frequenciesHz = plan.spectrum.map((point) => point.frequencyHz);
  const telescopes = data.bands.map((_, band) => makeTelescope(data, frame, band, start.observation.missingWavelengths));
  const aim = makeAim(frame);
  const pixels = frame.nx * frame.ny;
  const observe = (rays: StokesPlanes): readonly Float64Array[] => {
    const maps = plan.bands.map((band, index) => telescopes[index](bandCube(band, rays, pixels)));
    return data.planes.map((plane) => {
      const size = data.axes.nx * data.axes.ny;
      return maps[plane.band][plane.quantity].subarray(plane.channel * size, (plane.channel + 1) * size);
    });
  };
  const foregroundOf = (scene: Scene): number | Float64Array => foregroundDepths(scene, frame.wcs, frame.nx, frame.ny);
  const turn = ({ Q, U }: StokesPlanes, depth: number | Float64Array): void => {
    if (depth !== 0) turnByForeground(Q, U, frequenciesHz, depth);
  };
  const model = async (values: Float64Array, signal?: AbortSignal): Promise<readonly Float64Array[]> => {
    const scene = sceneOf(values);
    const { bundle, pixels: hit } = aim(scene);
    const seen = await backend({ scene, spectrum: plan.spectrum, bundle, origins: false }, { signal });
    const rays = spread(seen, hit, pixels, plan.spectrum.length);
    turn(rays, foregroundOf(scene));
    return observe(rays);
  };
  const slopes = async (values: Float64Array, signal?: AbortSignal): Promise<ModelSlopes | undefined> => {
    const { scene, paths, columns } = sceneSlopes(sceneOf, values, values.length);
    if (columns.filter((column) => column).length < fewestExact) return undefined;
    const { bundle, pixels: hit } = aim(scene);
    const seen = await backend({ scene, spectrum: plan.spectrum, bundle, origins: false, tangents: paths }, { signal });
    const planes = plan.spectrum.length;
    const depth = foregroundOf(scene);
    const rays = spread(seen, hit, pixels, planes);
    turn(rays, depth);
    const slopeMaps = columns.map((column) => {
      if (!column) return undefined;
      signal?.throwIfAborted();
      const slope = spread(combineTangents(seen.tangents, column.rates, planes * hit.length), hit, pixels, planes);
      turn(slope, depth);
      if (column.turnsForeground) addTurning(slope, rays, frequenciesHz, depthSlope(foregroundOf(column.ahead), foregroundOf(column.behind), column.width));
      return observe(slope);
    });
    return { maps: observe(rays), columns: slopeMaps };
  };
  return Object.assign(model, { slopes });
}

/** With fewer columns than this of a model's own, differences are as cheap. */
const fewestExact = 2;

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

/**
 * Which rays can meet the galaxy at all, and the pixels they belong to. The same rays are given
 * again while distance, centre and volume stay, so that they need not be sent to workers anew.
 */
function makeAim(frame: Frame): (scene: Scene) => { readonly bundle: RayBundle; readonly pixels: Int32Array } {
  let last: { key: string; bundle: RayBundle; pixels: Int32Array } | undefined;
  return (scene) => {
    const { distanceKpc, centre, volume } = scene.galaxy;
    const key = JSON.stringify([distanceKpc, centre, volume]);
    if (last?.key === key) return last;
    const all = raysOf(scene, frame);
    const reach = Math.hypot(volume.radiusKpc, volume.heightKpc);
    const pixels = Int32Array.from(all.northKpc.keys()).filter((k) => Math.hypot(all.northKpc[k], all.eastKpc[k]) <= reach);
    const pick = (offsets: Float64Array): Float64Array => Float64Array.from(pixels, (pixel) => offsets[pixel]);
    last = { key, bundle: { northKpc: pick(all.northKpc), eastKpc: pick(all.eastKpc) }, pixels };
    return last;
  };
}

/** Rays put back to their pixels, the sky empty elsewhere. */
function spread(rays: StokesPlanes, pixels: Int32Array, size: number, planes: number): StokesPlanes {
  const whole = (values: Float64Array): Float64Array => {
    const spreadOut = new Float64Array(planes * size);
    for (let plane = 0, k = 0; plane < planes; plane++) {
      for (const pixel of pixels) spreadOut[plane * size + pixel] = values[k++];
    }
    return spreadOut;
  };
  return { I: whole(rays.I), Q: whole(rays.Q), U: whole(rays.U) };
}

/** A function that brings one band's sky to the data's pixels and unit; I only where there are data of it. */
function makeTelescope(data: DataSet, frame: Frame, index: number, missingWavelengths: number | undefined): (sky: StokesPlanes) => StokesPlanes {
  const { nx, ny, margin, wcs } = frame;
  const { beam } = data.bands[index];
  const convolve = beam && beamConvolver(pixelBeam(beam, wcs.cd), nx, ny);
  const smooth = missingWavelengths === undefined ? undefined : beamConvolver(pixelBeam(missingBeam(missingWavelengths), wcs.cd), nx, ny);
  const perBeam = beam && data.unit === 'Jy/beam' ? beamSolidAngleSr(beam) : 1;
  const seesI = data.planes.some((plane) => plane.band === index && plane.quantity === 'I');
  return ({ I, Q, U }) => {
    const size = nx * ny;
    for (let start = 0; start < Q.length; start += size) {
      const plane = (stokes: Float64Array): Float64Array => stokes.subarray(start, start + size);
      convolve?.(plane(Q), plane(U));
      if (seesI) convolve?.(plane(I));
      if (!smooth) continue;
      const [broadQ, broadU, broadI] = [Q, U, I].map((stokes) => plane(stokes).slice());
      smooth(broadQ, broadU);
      smooth(broadI);
      for (let k = 0; k < size; k++) {
        Q[start + k] -= broadQ[k];
        U[start + k] -= broadU[k];
        I[start + k] -= broadI[k];
      }
    }
    const bring = (stokes: Float64Array): Float64Array => cropPlanes(stokes, nx, ny, margin).map((value) => value * perBeam);
    return { I: bring(I), Q: bring(Q), U: bring(U) };
  };
}
