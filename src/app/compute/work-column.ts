import { measureOnData, viewFrame, type Measured } from '../../figure/comparison.ts';
import { drawnRing } from '../../figure/sky-overview.ts';
import { frequencyLabel, polarizationView, profileOfP, profileOfRm, rotationMeasureView, type ViewFrame } from '../../figure/sky-views.ts';
import { chiSquared, type Likelihood } from '../../infer/likelihood.ts';
import { jointLikelihood } from '../../infer/other-data.ts';
import { makeJointModel } from '../../infer/joint-model.ts';
import { refuseNoOverlap } from '../../infer/overlap.ts';
import type { DataSet } from '../../infer/types.ts';
import { frameFromGrid } from '../../measure/disc.ts';
import { defaultRing, ringProfile, type Ring, type RingProfile } from '../../measure/ring-profile.ts';
import { traceFieldLines } from '../../ray/field-lines.ts';
import type { RayBackend } from '../../ray/job.ts';
import { symmetrySentences } from '../../ray/symmetry.ts';
import type { Scene } from '../../scene/types.ts';
import { centreMaps } from '../../sky/band-centre.ts';
import { observe } from '../../sky/observe.ts';
import { rotationMeasureMaps } from '../../sky/rotation-measure-map.ts';
import { InputError } from '../../units/input-error.ts';
import type { BandPicture, ColumnPicture, ObservedPicture } from './column-picture.ts';

/** The observation as a worker holds it. */
export interface WorkData {
  readonly data: DataSet;
  readonly likelihood: Likelihood;
  readonly assumptions: readonly string[];
}

/** A data set made ready. */
export function makeWorkData(data: DataSet, notes: readonly string[]): WorkData {
  return { data, likelihood: jointLikelihood(data), assumptions: [...data.assumptions, ...notes] };
}

export interface ColumnWork {
  readonly scene: Scene;
  readonly ringKpc?: readonly [number, number];
  readonly seen?: WorkData;
  readonly exact: boolean;
}

/** Pixels along the longer side of a preview, and its tolerance. */
const previewPixels = 33;
const previewTolerance = 2e-3;
const fieldLines = 60;

/** Everything that the line-up shows of a scene. Throws InputError where the observation lies elsewhere. */
export async function workColumn(work: ColumnWork, backend: RayBackend, signal: AbortSignal, now: () => number): Promise<ColumnPicture> {
  const begun = now();
  const scene = work.exact ? work.scene : coarser(work.scene, work.seen !== undefined);
  const ring = ringFor(scene, work.ringKpc);
  const { galaxy } = scene;
  const maps = work.seen ? await mapsOnData(scene, work.seen, ring, backend, signal) : await mapsOfScene(scene, ring, backend, signal);
  return {
    ...maps,
    pose: {
      inclination: galaxy.inclination,
      positionAngle: galaxy.positionAngle,
      distanceKpc: galaxy.distanceKpc,
      radiusKpc: galaxy.volume.radiusKpc,
      heightKpc: galaxy.volume.heightKpc,
    },
    lines: traceFieldLines(scene, { count: fieldLines }),
    symmetry: symmetrySentences(scene),
    exact: work.exact,
    seconds: (now() - begun) / 1000,
  };
}

/** The observation's maps, with the ring of the galaxy as `scene` lays it. */
export function pictureData({ data, assumptions }: WorkData, scene: Scene, ringKpc: readonly [number, number] | undefined): ObservedPicture {
  const ring = ringFor(scene, ringKpc);
  return { ...pictureOf(data, scene, ring, measureOnData(data, scene, ring), 'observed'), assumptions };
}

type Maps = Pick<ColumnPicture, 'bands' | 'wcs' | 'rotationMeasure' | 'rotationMeasureRing' | 'fit'>;

async function mapsOnData(scene: Scene, { data, likelihood }: WorkData, ring: Ring, backend: RayBackend, signal: AbortSignal): Promise<Maps> {
  refuseNoOverlap(data, scene.galaxy);
  const planes = await makeJointModel(data, scene, () => scene, backend)(new Float64Array(0), signal);
  const residuals = likelihood.residuals(planes);
  return {
    ...pictureOf(data, scene, ring, measureOnData(data, scene, ring, planes), 'model'),
    fit: { chi2: chiSquared(residuals), count: residuals.length },
  };
}

function pictureOf(data: DataSet, scene: Scene, ring: Ring, measured: Measured, label: string): Maps {
  const bands = measured.bands.map((band): BandPicture => {
    const name = frequencyLabel(band.centre.frequencyHz);
    return {
      label: name,
      frequencyHz: band.centre.frequencyHz,
      polarization: polarizationView(band.centre, data.unit, viewFrame(data, band, scene, ring), `P, ${name}`),
      isDebiased: band.centre.noise > 0,
      ...(band.profile && { ring: profileOfP(band.profile, label) }),
    };
  });
  return {
    bands: longestFirst(bands),
    wcs: data.axes.wcs,
    ...(measured.rm && measured.bands.length > 0 && { rotationMeasure: rotationMeasureView(measured.rm, viewFrame(data, measured.bands[0], scene, ring), 'RM') }),
    ...(measured.rmProfile && { rotationMeasureRing: profileOfRm(measured.rmProfile, label) }),
  };
}

async function mapsOfScene(scene: Scene, ring: Ring, backend: RayBackend, signal: AbortSignal): Promise<Maps> {
  const sky = await observe(scene, backend, { signal });
  const { inclination, positionAngle, distanceKpc } = scene.galaxy;
  const frame = frameFromGrid(sky.grid, scene.observation.beam);
  const view: ViewFrame = { frame, distanceKpc, rings: [drawnRing(ring, scene)] };
  const frequencies = new Set(sky.cubes.flatMap(({ channels }) => channels.map(({ frequencyHz }) => frequencyHz)));
  const rm = frequencies.size > 1 ? rotationMeasureMaps(sky.cubes) : undefined;
  const profiles: (RingProfile | undefined)[] = [];
  const bands = sky.cubes.map((cube): BandPicture => {
    const maps = centreMaps(cube);
    const name = frequencyLabel(maps.frequencyHz);
    const profile = refusedAsUndefined(() =>
      ringProfile({ Q: maps.Q, U: maps.U, sigmaQU: maps.noise, ...(rm && { rm: rm.rm, rmError: rm.rmError }) }, frame, { inclination, positionAngle, distanceKpc }, ring),
    );
    profiles.push(profile);
    return {
      label: name,
      frequencyHz: maps.frequencyHz,
      polarization: polarizationView(maps, cube.unit, view, `P, ${name}`),
      isDebiased: maps.noise > 0,
      ...(profile && { ring: profileOfP(profile, 'model') }),
    };
  });
  return {
    bands: longestFirst(bands),
    wcs: frame.wcs,
    ...(rm && { rotationMeasure: rotationMeasureView(rm, view, 'RM') }),
    ...(rm && profiles[0] && { rotationMeasureRing: profileOfRm(profiles[0], 'model') }),
  };
}

function longestFirst(bands: readonly BandPicture[]): readonly BandPicture[] {
  return [...bands].sort((a, b) => a.frequencyHz - b.frequencyHz);
}

/** The ring asked for, or the one that suits the galaxy. */
export function ringFor(scene: Scene, ringKpc: readonly [number, number] | undefined): Ring {
  const usual = defaultRing(scene.galaxy.volume.radiusKpc);
  return ringKpc ? { ...usual, innerKpc: ringKpc[0], outerKpc: ringKpc[1] } : usual;
}

/** The same sky in fewer pixels, without noise, to a looser tolerance; on the data's grid the pixels stay. */
function coarser(scene: Scene, onData: boolean): Scene {
  const { image } = scene.observation;
  const factor = onData ? 1 : Math.max(1, Math.max(image.nx, image.ny) / previewPixels);
  return {
    ...scene,
    observation: {
      ...scene.observation,
      image: {
        nx: Math.max(1, Math.round(image.nx / factor)),
        ny: Math.max(1, Math.round(image.ny / factor)),
        pixelArcsec: image.pixelArcsec * factor,
        ...(image.pixelKpc !== undefined && { pixelKpc: image.pixelKpc * factor }),
      },
      noise: undefined,
      bands: scene.observation.bands.map((band) => ({ ...band, noise: undefined })),
    },
    numerics: { ...scene.numerics, tolerance: Math.max(previewTolerance, scene.numerics.tolerance) },
  };
}

/** Discs seen too nearly edge-on have no rings: their profile is left out, not invented. */
function refusedAsUndefined<T>(measure: () => T): T | undefined {
  try {
    return measure();
  } catch (error) {
    if (error instanceof InputError) return undefined;
    throw error;
  }
}
