import type { GridSource } from '../field/grid-file.ts';
import { defaultRing } from '../measure/ring-profile.ts';
import type { Override } from '../scene/overrides.ts';
import { parseScene, sceneText } from '../scene/parse-scene.ts';
import { scenePath, scenePaths } from '../scene/paths.ts';
import type { Scene } from '../scene/types.ts';
import { InputError, placeText } from '../units/input-error.ts';
import { placed, resolveAxis } from './axis.ts';
import { pointCount } from './design.ts';
import type { SweepFile, SweepPlan, SweepVariant, VaryText } from './types.ts';

/** Most rows of one sweep: their places are kept in memory, some 20 bytes each. */
const mostRows = 100_000_000;

/** The text of a scene file and the path by which messages name it. */
export interface SceneSource {
  readonly file: string;
  readonly text: string;
}

/** Where a scene file's gridded numbers are read from. */
export type FilesOf = (sceneFile: string) => GridSource;

/**
 * Resolves a sweep against its scenes: `sources` in the order of `sweep.scenes`, `overrides` from
 * flags, for all of them. Varied paths that are no numbers of the scene (such as a parity) take lists
 * of words and make a variant of the scene each. Throws InputError, placed in the sweep, for unknown
 * paths, wrong units, values that are not allowed in any of the scenes, and measures without noise.
 */
export function planSweep(sweep: SweepFile, sources: readonly SceneSource[], overrides: readonly Override[], filesOf?: FilesOf): SweepPlan {
  const all = [...overrides, ...noiseOverride(sweep)];
  const files = sources.map(({ file }) => filesOf?.(file));
  const bases = sources.map(({ file, text }, k) => placed(sweep.scenes[k].place, () => parseScene(text, file, all, files[k])));
  const isNumber = (path: string): boolean => bases.every((scene) => scenePaths(scene).includes(path));
  const words = sweep.vary.filter((one) => one.list !== undefined && !isNumber(one.path));
  const numbers = sweep.vary.filter((one) => !words.includes(one));
  const variants = sweep.scenes.flatMap(({ name, place }, k) =>
    combinations(words).map((chosen): SweepVariant => {
      const changed = [...all, ...chosen];
      const { file, text } = sources[k];
      const scene = placedAtChoice(chosen, place, () => parseScene(text, file, changed, files[k]));
      const parts = [...(sweep.scenes.length > 1 ? [name] : []), ...chosen.map((one) => `${one.path} ${one.value}`)];
      return { name: parts.join(', ') || name, sceneName: name, choices: chosen.map(({ value }) => value), scene, sceneText: sceneText(text, file, changed) };
    }),
  );
  const scenes = variants.map(({ scene }) => scene);
  const axes = numbers.map((one) => resolveAxis(one, scenes, sweep.design));
  const plan: SweepPlan = {
    title: sweep.title,
    variants,
    choices: words.map(({ path }) => path),
    axes,
    design: sweep.design,
    samples: sweep.samples,
    seed: sweep.seed,
    realisations: sweep.realisations,
    measures: sweep.measures,
    maps: sweep.maps,
    ring: { ...(sweep.ring ? { innerKpc: sweep.ring[0], outerKpc: sweep.ring[1] } : defaultRing(scenes[0].galaxy.volume.radiusKpc)), sectors: sweep.sectors },
    threshold: sweep.threshold,
    ...heatMapOf(sweep, numbers),
  };
  checkPlan(plan);
  return plan;
}

function noiseOverride({ noise }: SweepFile): Override[] {
  return noise ? [{ path: 'observation.noise', value: noise.text, flag: placeText(noise.place) }] : [];
}

/** Every combination of the values of varied words, as overrides. */
function combinations(words: readonly VaryText[]): readonly (readonly Override[])[] {
  return words.reduce<readonly (readonly Override[])[]>(
    (sofar, { path, list = [] }) => sofar.flatMap((chosen) => list.map(({ text, place }): readonly Override[] => [...chosen, { path, value: text, flag: placeText(place) }])),
    [[]],
  );
}

function placedAtChoice(chosen: readonly Override[], place: VaryText['place'], work: () => Scene): Scene {
  return chosen.length > 0 ? work() : placed(place, work);
}

function heatMapOf({ heatMap }: SweepFile, numbers: readonly VaryText[]): Pick<SweepPlan, 'heatMap'> {
  const index = (path: string): number => numbers.findIndex((one) => one.path === path);
  if (!heatMap) return numbers.length > 1 ? { heatMap: [0, 1] } : {};
  const pair = [index(heatMap.paths[0]), index(heatMap.paths[1])] as const;
  if (pair.includes(-1)) throw new InputError('a heat map is of two quantities that are numbers', heatMap.place);
  return { heatMap: pair };
}

function checkPlan(plan: SweepPlan): void {
  const rows = pointCount(plan) * Math.max(1, plan.realisations);
  if (rows > mostRows) throw new InputError(`the sweep has ${rows} rows; allowed: ${mostRows}`);
  const bands = plan.variants.map(({ scene }) => scene.observation.bands.map(({ name }) => name).join(', '));
  const other = bands.findIndex((names) => names !== bands[0]);
  if (other > 0) throw new InputError(`the scenes of a sweep need the same bands: "${plan.variants[0].name}" has ${bands[0]}, "${plan.variants[other].name}" ${bands[other]}`);
  for (const { name, scene } of plan.variants) {
    const noisy = scene.observation.bands.every((band) => (band.noise ?? scene.observation.noise ?? 0) > 0);
    if (plan.measures.includes('detectability') && !noisy) throw new InputError(`detectability needs noise: give the sweep \`noise\`, such as 20 uJy/beam, or "${name}" one`);
    const frequencies = new Set(scene.observation.bands.flatMap((band) => band.channels.map(({ frequencyHz }) => frequencyHz)));
    if ((plan.measures.includes('gradient') || plan.maps.includes('RM')) && frequencies.size < 2) throw new InputError(`rotation measures need two frequencies or more; "${name}" has one`);
    if (plan.measures.includes('depolarization') && scene.observation.bands.length < 2) throw new InputError(`depolarization is between bands; "${name}" has one`);
  }
  if (plan.design === 'sensitivity' && plan.axes.length === 0) throw new InputError('`design: sensitivity` needs numbers to vary');
  if (plan.realisations > 0 && !plan.variants.some(({ scene }) => isRandom(scene))) {
    throw new InputError(`${plan.realisations} realisations of a scene without noise or turbulence would all be the same: give the sweep \`noise\`, or leave \`realisations\` out`);
  }
}

/** Whether anything in a scene is drawn from its seed. */
function isRandom(scene: Scene): boolean {
  return raysDependOnSeed(scene) || scene.observation.bands.some((band) => (band.noise ?? scene.observation.noise ?? 0) > 0);
}

/** Whether the rays themselves, not the noise alone, change with the seed: a random screen, resolved turbulence. */
export function raysDependOnSeed(scene: Scene): boolean {
  return scene.observation.foregroundScreen !== undefined || Object.keys(scene.turbulence).some((kind) => !['unresolved', 'ordered'].includes(kind));
}

/** The scene of a variant with the values of a point written into it. Throws InputError where one is not allowed. */
export function sceneAt(plan: SweepPlan, variant: number, values: ArrayLike<number>): Scene {
  const start = plan.variants[variant].scene;
  return plan.axes.reduce((scene, { path }, k) => scenePath(scene, path).set(scene, values[k]), start);
}
