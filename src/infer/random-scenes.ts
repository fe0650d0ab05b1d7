import { factorCholesky, logDeterminantOf, solveLower } from '../math/cholesky.ts';
import { meanOf } from '../math/moments.ts';
import { scenePath } from '../scene/paths.ts';
import type { Scene } from '../scene/types.ts';
import type { ForwardModel } from './forward.ts';
import type { Likelihood } from './likelihood.ts';
import { shrunkScatter } from './scatter-covariance.ts';
import type { SceneOf } from './scene-of.ts';

/** Realisations begin here: no user has made data from one of them. */
const firstRealisation = 500_000_000;

/** A scene's field of another realisation; `sceneOf` as before in all else. */
export function realisationOf(sceneOf: SceneOf, k: number): SceneOf {
  return (values) => {
    const scene = sceneOf(values);
    return scenePath(scene, 'turbulence.resolved.realisation').set(scene, firstRealisation + k);
  };
}

/** Whether two observers of a scene could see different random fields. */
export function isRandom({ turbulence }: Pick<Scene, 'turbulence'>): boolean {
  return turbulence.resolved !== undefined;
}

/** A model whose maps are the mean of those of several models. */
export function meanModel(models: readonly ForwardModel[]): ForwardModel {
  return async (values, signal) => {
    const maps = await Promise.all(models.map((model) => model(values, signal)));
    return maps[0].map((_, k) => meanOf(maps.map((one) => one[k])));
  };
}

/**
 * The likelihood of a hypothesis whose turbulence is drawn, from the maps of its realisations at one
 * set of values: data scatter about the mean with the covariance of noise plus that of the
 * realisations, which is shrunk (Ledoit & Wolf 2004) after every number has been divided by its total
 * rms, so that quiet sectors are not blurred by loud ones. Models are means of the first `few`
 * realisations; what these differ from the mean of all by, here, is taken off them everywhere, so that
 * their own scatter enters only as far as it changes with the parameters. `likelihood` is of sums over sectors.
 */
export function withScatter(likelihood: Likelihood, realisations: readonly (readonly Float64Array[])[], few: number): Likelihood {
  const draws = realisations.map(likelihood.residuals);
  const count = draws.length;
  const mean = meanOf(draws);
  const n = mean.length;
  const ofFew = likelihood.residuals(realisations[0].map((_, k) => meanOf(realisations.slice(0, few).map((one) => one[k]))));
  const rms = mean.map((value, j) => Math.sqrt(1 + draws.reduce((sum, draw) => sum + (draw[j] - value) ** 2, 0) / count));
  const { covariance: scatter } = shrunkScatter(draws.map((draw) => draw.map((value, j) => value / rms[j])));
  // The mean of all is itself uncertain.
  const widened = 1 + 1 / count;
  const covariance = scatter.map((value, k) => {
    const [row, column] = [Math.floor(k / n), k % n];
    return widened * value * rms[row] * rms[column] + (row === column ? 1 : 0);
  });
  const lower = factorCholesky(covariance, n);
  if (!lower) throw new Error('The covariance of the realisations is not positive definite.');
  return {
    ...likelihood,
    logNormalisation: likelihood.logNormalisation - logDeterminantOf(lower, n) / 2,
    residuals: (model) => solveLower(lower, likelihood.residuals(model).map((value, j) => value + mean[j] - ofFew[j])),
  };
}
