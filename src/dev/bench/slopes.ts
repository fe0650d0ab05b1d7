import { cpuUsage } from 'node:process';
import { findMapScale, makeRayEngine, traceRays, type RayEngine } from '../../ray/trace.ts';
import { findTangentParameter } from '../../ray/tangent-parameters.ts';
import type { SpectralPoint } from '../../ray/integrand.ts';
import type { RayBundle } from '../../ray/types.ts';
import { scenePaths } from '../../scene/paths.ts';
import type { Scene } from '../../scene/types.ts';
import spiralText from '../../../test/reference/a-spiral-quadrupole.yaml?raw';
import helicalText from '../../../test/reference/d-damped-helical.yaml?raw';
import { parseScene } from '../../scene/parse-scene.ts';
import { channels, squareBundle, tolerance } from './prepare.ts';

/** What derivatives of a scene cost, in CPU of forward models followed in the same run. */
interface SlopeCost {
  readonly scene: string;
  /** Microseconds per ray of the forward model. */
  readonly forwardMicroseconds: number;
  /** Forward models per derivative, by kind of parameter, with how many were asked for at once. */
  readonly kinds: readonly { readonly kind: SlopeKind; readonly parameters: number; readonly each: number }[];
  /** Forward models for one derivative asked for alone, by path. */
  readonly alone: readonly { readonly path: string; readonly cost: number }[];
}

type SlopeKind = 'strengths and densities' | 'shapes' | 'all';

/** Parameters in which the integrand's parts are linear. */
const linear = /\.(strength|density|normalisation)$/;

/** Measures, in one run, what derivatives of a scene cost: the least of a few rounds, in turn. */
function measureSlopes(name: string, scene: Scene, spectrum: readonly SpectralPoint[], bundle: RayBundle, rounds = 3): SlopeCost {
  const paths = scenePaths(scene).filter((path) => findTangentParameter(scene, path) !== undefined);
  const kinds: readonly (readonly [SlopeKind, readonly string[]])[] = [
    ['strengths and densities', paths.filter((path) => linear.test(path))],
    ['shapes', paths.filter((path) => !linear.test(path))],
    ['all', paths],
  ];
  const lists = [[], ...kinds.map(([, list]) => list), ...paths.map((path) => [path])];
  const engines = lists.map((list) => makeRayEngine(scene, spectrum, undefined, list));
  const scale = findMapScale(engines[0], scene, bundle);
  const least = lists.map(() => Infinity);
  for (let round = 0; round <= rounds; round++) {
    engines.forEach((engine, k) => {
      const time = cpuOf(engine, scene, bundle, scale);
      // The first round warms up.
      if (round > 0) least[k] = Math.min(least[k], time);
    });
  }
  const [forward, ...others] = least;
  return {
    scene: name,
    forwardMicroseconds: forward / bundle.northKpc.length,
    kinds: kinds.map(([kind, list], k) => ({ kind, parameters: list.length, each: (others[k] - forward) / forward / Math.max(1, list.length) })),
    alone: paths.map((path, k) => ({ path, cost: (others[kinds.length + k] - forward) / forward })),
  };
}

function cpuOf(engine: RayEngine, scene: Scene, bundle: RayBundle, scale: ReturnType<typeof findMapScale>): number {
  const before = cpuUsage();
  traceRays(engine, scene, bundle, scale);
  const { user, system } = cpuUsage(before);
  return user + system;
}

/** What derivatives cost, for a scene without and one with unresolved turbulence. */
export function timeSlopes(): void {
  console.log('\nderivatives beside following rays alone, three channels, forward models each (CPU of this run)');
  const spectrum = channels(3).map((frequencyHz) => ({ frequencyHz, centreHz: frequencyHz }));
  for (const [name, text] of [['a-spiral-quadrupole', spiralText], ['d-damped-helical', helicalText]] as const) {
    const scene = parseScene(text, `${name}.yaml`);
    const cost = measureSlopes(name, { ...scene, numerics: { ...scene.numerics, tolerance } }, spectrum, squareBundle(64));
    console.log(slopeLines(cost).join('\n'));
  }
}

/** One line per scene and kind. */
function slopeLines({ scene, forwardMicroseconds, kinds, alone }: SlopeCost): readonly string[] {
  const dearest = [...alone].sort((a, b) => b.cost - a.cost)[0];
  return [
    `${scene}: forward ${forwardMicroseconds.toFixed(2)} µs a ray`,
    ...kinds.filter(({ parameters }) => parameters > 0).map(({ kind, parameters, each }) => `  ${kind}: ${each.toFixed(2)} forward models each (${parameters} at once)`),
    ...(dearest ? [`  dearest alone: ${dearest.path}, ${dearest.cost.toFixed(2)} forward models`] : []),
  ];
}
