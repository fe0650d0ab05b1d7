import type { RayBackend } from '../ray/job.ts';
import type { Override } from '../scene/overrides.ts';
import { scenePath } from '../scene/paths.ts';
import type { Scene } from '../scene/types.ts';
import { InputError } from '../units/input-error.ts';
import { formatQuantity } from '../units/quantity.ts';
import type { ForwardModel } from './forward.ts';
import { resolveFree } from './free-parameters.ts';
import { makeJointModel } from './joint-model.ts';
import { calibrationParameters, foregroundNuisance, withCalibration } from './nuisances.ts';
import { refuseNoOverlap } from './overlap.ts';
import { isRandom, meanModel, realisationOf } from './random-scenes.ts';
import type { FreeParameter } from './prior.ts';
import { sceneWith, type SceneOf } from './scene-of.ts';
import type { Hypothesis, Study, TurbulenceJudge } from './study-types.ts';
import { compileTie, followTies, type Tie } from './ties.ts';
import type { DataSet } from './types.ts';

/** A hypothesis with its scene and all that is free in it. */
export interface FreeHypothesis {
  readonly name: string;
  readonly scene: Scene;
  readonly parameters: readonly FreeParameter[];
  /** Numbers that follow from the free ones, in the scene and in the posterior only. */
  readonly ties: readonly Tie[];
  readonly derived: readonly Tie[];
  readonly sceneOf: SceneOf;
  /** How the scatter of its drawn turbulence is judged; undefined where none is drawn, or one realisation is taken as it is. */
  readonly judge?: TurbulenceJudge;
}

/**
 * The free parameters of a hypothesis: its own, the foreground's depth and factors of calibration.
 * Throws InputError, placed at the hypothesis, where one does not fit the scene or the data lie elsewhere.
 */
export function freeHypothesis(hypothesis: Hypothesis, study: Pick<Study, 'foreground' | 'calibration' | 'turbulence'>, scene: Scene, data: DataSet): FreeHypothesis {
  placed(hypothesis, () => refuseNoOverlap(data, scene.galaxy));
  const turned = data.planes.some(({ quantity }) => quantity !== 'I') || (data.others?.length ?? 0) > 0;
  const named = [...hypothesis.free.map(({ path }) => path), ...hypothesis.tied.map((tie) => tie.name)];
  const foreground = foregroundNuisance(turned ? study.foreground : undefined, scene, named, hypothesis.place);
  const ofScene = resolveFree([...hypothesis.free, ...(foreground ? [foreground] : [])], scene);
  const parameters = [...ofScene, ...calibrationParameters(study.calibration, data.bands)];
  const ties = hypothesis.tied.map((tie) => compileTie(tie, scene));
  const paths = ofScene.map(({ path }) => path);
  const sceneOf: SceneOf = (values) => followTies(sceneWith(scene, paths, values), ties);
  placed(hypothesis, () => followTies(scene, ties));
  const derived = hypothesis.derived.map((one) => compileTie(one, scene));
  const { turbulence } = study;
  const judged = turbulence !== 'single' && isRandom(scene);
  if (judged) placed(hypothesis, () => refuseBent(data));
  return { name: hypothesis.name, scene, parameters, ties, derived, sceneOf, ...(judged && { judge: turbulence }) };
}

/** The model of the data that a hypothesis makes: where its turbulence is drawn and judged, the mean of realisations. */
export function forwardOf(hypothesis: FreeHypothesis, data: DataSet, backend: RayBackend): ForwardModel {
  const { judge, sceneOf } = hypothesis;
  return judge ? meanModel(realisationModels(hypothesis, data, backend, judge.mean)) : modelOf(hypothesis, sceneOf, data, backend);
}

/** Models that differ by the realisation of their random field alone. */
export function realisationModels(hypothesis: FreeHypothesis, data: DataSet, backend: RayBackend, count: number): ForwardModel[] {
  return Array.from({ length: count }, (_, k) => modelOf(hypothesis, realisationOf(hypothesis.sceneOf, k), data, backend));
}

function modelOf({ scene, parameters }: FreeHypothesis, sceneOf: SceneOf, data: DataSet, backend: RayBackend): ForwardModel {
  return withCalibration(makeJointModel(data, scene, sceneOf, backend), data, parameters);
}

/** The mean of realisations is that of Stokes parameters and depths, not of angles, nor of pixels by the thousand. */
function refuseBent({ others = [] }: DataSet): void {
  const bent = others.find(({ kind, quantity }) => kind === 'map' || quantity === 'chi');
  if (bent) {
    throw new InputError(`the scatter of drawn turbulence is judged in maps of I, Q and U, profiles of P and RM, spectra and sources, not in ${bent.label}; leave it out, or state \`turbulence: single\` to take the one realisation as it is`);
  }
}

/** The changes of a scene's text that make it the scene of the given values, ties followed. */
export function bestOverrides({ parameters, ties, sceneOf }: FreeHypothesis, values: ArrayLike<number>): readonly Override[] {
  const best = sceneOf(values);
  const ofScene = parameters.filter(({ calibrationBand }) => calibrationBand === undefined);
  return [...ofScene.map(({ path }) => path), ...ties.map(({ name }) => name)].map((path): Override => {
    const { unit, shownUnit, get } = scenePath(best, path);
    return { path, value: formatQuantity(get(), unit, shownUnit), flag: path };
  });
}

function placed<T>({ place }: Hypothesis, work: () => T): T {
  try {
    return work();
  } catch (error) {
    throw error instanceof InputError ? error.at(place) : error;
  }
}
