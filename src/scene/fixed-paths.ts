import { InputError } from '../units/input-error.ts';
import { checkEquipartition } from './equipartition-index.ts';
import { sceneLimits } from './limits.ts';
import type { SceneLimit } from './limits.ts';
import { arcsecOf, gradientPerArcsec } from './observation.ts';
import { splitTurbulence } from './resolved-turbulence.ts';
import type { Beam, CosmicRays, ForegroundGradient, ForegroundScreen, Galaxy, Observation, OrderedTurbulence, ResolvedTurbulence, Scene, UnresolvedTurbulence } from './types.ts';

/** What a path of a scene reads and writes; `SceneLimit` says in which unit and range. */
export interface PathEntry extends SceneLimit {
  readonly path: string;
  /** The number in `internalUnit`; undefined where the scene has no such thing. */
  read(scene: Scene): number | undefined;
  write(scene: Scene, value: number): Scene;
}

/** The numbers of a scene that belong to no component. */
export const fixedPaths: readonly PathEntry[] = [
  {
    path: 'galaxy.distance',
    ...sceneLimits.distance,
    read: ({ galaxy }) => galaxy.distanceKpc,
    write: withDistance,
  },
  galaxyPath('inclination', sceneLimits.inclination, ({ inclination }) => inclination, (old, inclination) => ({ ...old, inclination })),
  galaxyPath('positionAngle', sceneLimits.positionAngle, ({ positionAngle }) => positionAngle, (old, positionAngle) => ({ ...old, positionAngle })),
  galaxyPath('volume.radius', sceneLimits.volumeRadius, ({ volume }) => volume.radiusKpc, (old, radiusKpc) => ({ ...old, volume: { ...old.volume, radiusKpc } })),
  galaxyPath('volume.height', sceneLimits.volumeHeight, ({ volume }) => volume.heightKpc, (old, heightKpc) => ({ ...old, volume: { ...old.volume, heightKpc } })),
  {
    path: 'cosmicRays.index',
    ...sceneLimits.index,
    read: ({ cosmicRays }) => cosmicRays.index,
    write: (scene, index) => {
      if (scene.cosmicRays.equipartition) {
        checkEquipartition(index, (reason) => {
          throw new InputError(`cosmicRays.index: ${reason}`);
        });
      }
      return { ...scene, cosmicRays: { ...scene.cosmicRays, index } };
    },
  },
  {
    path: 'cosmicRays.equipartition.protonRatio',
    ...sceneLimits.protonRatio,
    read: ({ cosmicRays }) => cosmicRays.equipartition?.protonRatio,
    write: (scene, protonRatio) => ({ ...scene, cosmicRays: { ...scene.cosmicRays, equipartition: { protonRatio } } }),
  },
  scaleToPath('flux', sceneLimits.flux, ({ fluxJy }) => fluxJy, (old, fluxJy) => ({ ...old, fluxJy })),
  scaleToPath('at', sceneLimits.fluxAt, ({ atHz }) => atHz, (old, atHz) => ({ ...old, atHz })),
  turbulencePath('rms', sceneLimits.rms, ({ rmsUG }) => rmsUG, (old, rmsUG) => ({ ...old, rmsUG })),
  turbulencePath('cell', sceneLimits.cell, ({ cellKpc }) => cellKpc, (old, cellKpc) => ({ ...old, cellKpc })),
  orderedPath('rms', sceneLimits.orderedRms, ({ rmsUG }) => rmsUG, (old, rmsUG) => ({ ...old, rmsUG })),
  orderedPath('cell', sceneLimits.cell, ({ cellKpc }) => cellKpc, (old, cellKpc) => ({ ...old, cellKpc })),
  orderedPath('pitch', sceneLimits.orderedPitch, ({ along, pitch }) => (along === 'pitch' ? pitch : undefined), (old, pitch) => ({ ...old, pitch })),
  {
    path: 'freeFree.temperature',
    ...sceneLimits.temperature,
    read: ({ freeFree }) => freeFree?.temperatureK,
    write: (scene, temperatureK) => ({ ...scene, freeFree: { temperatureK } }),
  },
  resolvedPath('rms', sceneLimits.resolvedRms, ({ rmsUG }) => rmsUG, (old, rmsUG) => ({ ...old, rmsUG })),
  resolvedPath('outerScale', sceneLimits.outerScale, ({ outerScaleKpc }) => outerScaleKpc, withOuterScale),
  resolvedPath('verticalRatio', sceneLimits.verticalRatio, ({ verticalRatio }) => verticalRatio, (old, verticalRatio) => ({ ...old, verticalRatio })),
  resolvedPath('electrons.rms', sceneLimits.electronRms, ({ electrons }) => electrons?.rms, (old, rms) => ({ ...old, ...(old.electrons && { electrons: { ...old.electrons, rms } }) })),
  resolvedPath('electrons.correlation', sceneLimits.electronCorrelation, ({ electrons }) => electrons?.correlation, (old, correlation) => ({ ...old, ...(old.electrons && { electrons: { ...old.electrons, correlation } }) })),
  resolvedPath('realisation', sceneLimits.realisation, ({ realisation }) => realisation, (old, realisation) => ({ ...old, realisation })),
  observationPath('foreground.depth', sceneLimits.foregroundDepth, ({ foregroundDepth }) => foregroundDepth, (old, foregroundDepth) => ({ ...old, foregroundDepth })),
  ...gradientPaths(),
  screenPath('rms', sceneLimits.screenRms, ({ rmsRadM2 }) => rmsRadM2, (old, rmsRadM2) => ({ ...old, rmsRadM2 })),
  screenPath('scale', sceneLimits.screenScale, ({ scaleArcsec }) => scaleArcsec, (old, scaleArcsec) => ({ ...old, scaleArcsec })),
  noisePath('Jy/beam', sceneLimits.noiseBeam),
  noisePath('Jy/sr', sceneLimits.noiseSteradian),
  beamPath('major', sceneLimits.beamMajor, ({ majorArcsec }) => majorArcsec, (old, majorArcsec) => ({ ...old, majorArcsec })),
  beamPath('minor', sceneLimits.beamMinor, ({ minorArcsec }) => minorArcsec, (old, minorArcsec) => ({ ...old, minorArcsec })),
  beamPath('angle', sceneLimits.beamAngle, ({ angle }) => angle, (old, angle) => ({ ...old, angle })),
  {
    path: 'numerics.tolerance',
    ...sceneLimits.tolerance,
    read: ({ numerics }) => numerics.tolerance,
    write: (scene, tolerance) => ({ ...scene, numerics: { ...scene.numerics, tolerance } }),
  },
  {
    path: 'numerics.seed',
    ...sceneLimits.seed,
    read: ({ numerics }) => numerics.seed,
    write: (scene, seed) => ({ ...scene, numerics: { ...scene.numerics, seed } }),
  },
];

/** What is given in kpc keeps its size in the galaxy; what is given in arcsec keeps its size on the sky. */
function withDistance(scene: Scene, distanceKpc: number): Scene {
  const { image, foregroundGradient } = scene.observation;
  const perKpc = foregroundGradient?.radM2PerKpc;
  const gradient = perKpc === undefined ? foregroundGradient : { ...foregroundGradient, angle: foregroundGradient?.angle ?? 0, radM2PerKpc: perKpc, radM2PerArcsec: gradientPerArcsec(perKpc, distanceKpc) };
  const pixelArcsec = image.pixelKpc === undefined ? image.pixelArcsec : arcsecOf(image.pixelKpc, distanceKpc);
  return {
    ...scene,
    galaxy: { ...scene.galaxy, distanceKpc },
    observation: { ...scene.observation, image: { ...image, pixelArcsec }, ...(gradient && { foregroundGradient: gradient }) },
  };
}

function galaxyPath(key: string, limit: SceneLimit, read: (old: Galaxy) => number, write: (old: Galaxy, value: number) => Galaxy): PathEntry {
  return {
    path: `galaxy.${key}`,
    ...limit,
    read: ({ galaxy }) => read(galaxy),
    write: (scene, value) => ({ ...scene, galaxy: write(scene.galaxy, value) }),
  };
}

function observationPath(
  key: string,
  limit: SceneLimit,
  read: (old: Observation) => number | undefined,
  write: (old: Observation, value: number) => Observation,
): PathEntry {
  return {
    path: `observation.${key}`,
    ...limit,
    read: ({ observation }) => read(observation),
    write: (scene, value) => ({ ...scene, observation: write(scene.observation, value) }),
  };
}

/** Noise is per beam where there is a beam, so that only one of the two paths exists in a scene. */
function noisePath(unit: 'Jy/beam' | 'Jy/sr', limit: SceneLimit): PathEntry {
  const applies = ({ beam }: Observation): boolean => (beam !== undefined) === (unit === 'Jy/beam');
  return observationPath(
    'noise',
    limit,
    (old) => (applies(old) ? old.noise : undefined),
    (old, noise) => ({ ...old, noise }),
  );
}

function beamPath(key: string, limit: SceneLimit, read: (old: Beam) => number, write: (old: Beam, value: number) => Beam): PathEntry {
  return observationPath(
    `beam.${key}`,
    limit,
    ({ beam }) => beam && read(beam),
    (old, value) => {
      const beam = old.beam && write(old.beam, value);
      if (beam && beam.minorArcsec > beam.majorArcsec) {
        throw new InputError(`observation.beam.${key}: the minor axis, ${beam.minorArcsec} arcsec, would be larger than the major axis, ${beam.majorArcsec} arcsec`);
      }
      return { ...old, ...(beam && { beam }) };
    },
  );
}

function turbulencePath(
  key: string,
  limit: SceneLimit,
  read: (old: UnresolvedTurbulence) => number,
  write: (old: UnresolvedTurbulence, value: number) => UnresolvedTurbulence,
): PathEntry {
  return {
    path: `turbulence.unresolved.${key}`,
    ...limit,
    read: ({ turbulence }) => turbulence.unresolved && read(turbulence.unresolved),
    write: (scene, value) => {
      const old = scene.turbulence.unresolved;
      return old ? { ...scene, turbulence: { ...scene.turbulence, unresolved: write(old, value) } } : scene;
    },
  };
}

function orderedPath(
  key: string,
  limit: SceneLimit,
  read: (old: OrderedTurbulence) => number | undefined,
  write: (old: OrderedTurbulence, value: number) => OrderedTurbulence,
): PathEntry {
  return {
    path: `turbulence.ordered.${key}`,
    ...limit,
    read: ({ turbulence }) => turbulence.ordered && read(turbulence.ordered),
    write: (scene, value) => {
      const old = scene.turbulence.ordered;
      return old ? { ...scene, turbulence: { ...scene.turbulence, ordered: write(old, value) } } : scene;
    },
  };
}

function resolvedPath(
  key: string,
  limit: SceneLimit,
  read: (old: ResolvedTurbulence) => number | undefined,
  write: (old: ResolvedTurbulence, value: number) => ResolvedTurbulence,
): PathEntry {
  return {
    path: `turbulence.resolved.${key}`,
    ...limit,
    read: ({ turbulence }) => turbulence.resolved && read(turbulence.resolved),
    write: (scene, value) => {
      const old = scene.turbulence.resolved;
      return old ? { ...scene, turbulence: { ...scene.turbulence, resolved: write(old, value) } } : scene;
    },
  };
}

type ScaleTo = NonNullable<CosmicRays['scaleTo']>;

function scaleToPath(key: string, limit: SceneLimit, read: (old: ScaleTo) => number, write: (old: ScaleTo, value: number) => ScaleTo): PathEntry {
  return {
    path: `cosmicRays.scaleTo.${key}`,
    ...limit,
    read: ({ cosmicRays }) => cosmicRays.scaleTo && read(cosmicRays.scaleTo),
    write: (scene, value) => {
      const old = scene.cosmicRays.scaleTo;
      return old ? { ...scene, cosmicRays: { ...scene.cosmicRays, scaleTo: write(old, value) } } : scene;
    },
  };
}

/** The grid stays as it is: an outer scale that it cannot hold is refused. */
function withOuterScale(old: ResolvedTurbulence, outerScaleKpc: number): ResolvedTurbulence {
  const { shortestKpc } = splitTurbulence(old, 0);
  if (outerScaleKpc <= shortestKpc || outerScaleKpc > old.boxKpc) {
    throw new InputError(`turbulence.resolved.outerScale: ${outerScaleKpc} kpc is not between the shortest wave that is resolved, ${shortestKpc.toPrecision(3)} kpc, and the box, ${old.boxKpc} kpc`);
  }
  return { ...old, outerScaleKpc };
}

/** The amount is an angular or a linear gradient, as the scene gives it; only one of the two paths exists. */
function gradientPaths(): readonly PathEntry[] {
  const path = (
    key: 'amount' | 'angle',
    limit: SceneLimit,
    read: (old: ForegroundGradient) => number | undefined,
    write: (scene: Scene, old: ForegroundGradient, value: number) => ForegroundGradient,
  ): PathEntry => ({
    path: `observation.foreground.gradient.${key}`,
    ...limit,
    read: ({ observation }) => observation.foregroundGradient && read(observation.foregroundGradient),
    write: (scene, value) => {
      const old = scene.observation.foregroundGradient;
      return old ? { ...scene, observation: { ...scene.observation, foregroundGradient: write(scene, old, value) } } : scene;
    },
  });
  return [
    path(
      'amount',
      sceneLimits.gradientAngular,
      ({ radM2PerArcsec, radM2PerKpc }) => (radM2PerKpc === undefined ? radM2PerArcsec : undefined),
      (_, old, radM2PerArcsec) => ({ ...old, radM2PerArcsec }),
    ),
    path('amount', sceneLimits.gradientLinear, ({ radM2PerKpc }) => radM2PerKpc, ({ galaxy }, old, radM2PerKpc) => ({
      ...old,
      radM2PerKpc,
      radM2PerArcsec: gradientPerArcsec(radM2PerKpc, galaxy.distanceKpc),
    })),
    path('angle', sceneLimits.gradientAngle, ({ angle }) => angle, (_, old, angle) => ({ ...old, angle })),
  ];
}

function screenPath(
  key: 'rms' | 'scale',
  limit: SceneLimit,
  read: (old: ForegroundScreen) => number,
  write: (old: ForegroundScreen, value: number) => ForegroundScreen,
): PathEntry {
  return observationPath(
    `foreground.random.${key}`,
    limit,
    ({ foregroundScreen }) => foregroundScreen && read(foregroundScreen),
    (old, value) => (old.foregroundScreen ? { ...old, foregroundScreen: write(old.foregroundScreen, value) } : old),
  );
}
