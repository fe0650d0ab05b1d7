import { fitModel, type Fit } from '../../src/infer/fit.ts';
import type { ForwardModel } from '../../src/infer/forward.ts';
import { resolveFree } from '../../src/infer/free-parameters.ts';
import { makeLikelihood, type Likelihood } from '../../src/infer/likelihood.ts';
import type { FreeParameter } from '../../src/infer/prior.ts';
import { meanModel, realisationOf, withScatter } from '../../src/infer/random-scenes.ts';
import { sceneWith } from '../../src/infer/scene-of.ts';
import { inSectors } from '../../src/infer/sector-basis.ts';
import { makeSkyModel } from '../../src/infer/sky-model.ts';
import type { DataSet } from '../../src/infer/types.ts';
import { factorCholesky, solveLower } from '../../src/math/cholesky.ts';
import { randomStream } from '../../src/math/random.ts';
import { localBackend } from '../../src/ray/job.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { scenePath } from '../../src/scene/paths.ts';
import { smallScene } from '../cli/run.ts';
import { testAxes } from './grids.ts';

const scene = parseScene(
  smallScene.replace('turbulence: {unresolved: {rms: 5 uG, cell: 0.05 kpc}}', 'turbulence: {resolved: {rms: 2.5 uG, outerScale: 8 kpc, box: 24 kpc, cells: 16, smallest: 4.5 kpc, follows: gas}}'),
  'turbulent.scene.yaml',
);
const axes = testAxes(9, 9, 60);
const beam = { majorArcsec: 120, minorArcsec: 120, angle: 0 };
const bands = [1.4e9, 4.8e9].map((frequencyHz) => ({ name: `${frequencyHz / 1e9} GHz`, channels: [{ frequencyHz, widthHz: 0 }], beam }));
const data: DataSet = {
  axes, unit: 'Jy/beam', bands, assumptions: [],
  planes: bands.flatMap((_, band) => (['Q', 'U'] as const).map((quantity) => ({ quantity, band, channel: 0, values: new Float64Array(81), noise: 1e-4, correlation: beam }))),
};
const place = { file: 'a' };
const paths = ['field.disc.strength', 'field.disc.pitch'];
const parameters: FreeParameter[] = resolveFree(
  [['2 uG', '12 uG'], ['-75 deg', '35 deg']].map((ends, k) => ({ path: paths[k], kind: 'uniform', values: [{ text: ends[0], place }, { text: ends[1], place }], place })), scene,
);
const sceneOf = (values: ArrayLike<number>): typeof scene => sceneWith(scene, paths, values);
const modelOf = (of: typeof sceneOf): ForwardModel => makeSkyModel(data, scene, of, localBackend());
const truth = Float64Array.from(paths, (path) => scenePath(scene, path).get());

/** The likelihood of noisy observed maps: whitened maps are minus residuals against zero data. */
function observed(base: Likelihood, maps: readonly Float64Array[], index: number): Likelihood {
  const random = randomStream(8, 'noise', index);
  const seen = base.residuals(maps).map((value) => -value + random.gaussian());
  return { ...base, residuals: (model) => base.residuals(model).map((value, k) => value + seen[k]) };
}

/** Data made from realisations 0, 1, ... of a turbulent galaxy: how often the truth lies in the 95 % region of the fit. */
export async function coverage(sets: number): Promise<{ readonly withCovariance: number; readonly without: number; readonly chi2PerN: number }> {
  const base = makeLikelihood(data);
  const drawn = await Promise.all(Array.from({ length: 40 }, (_, k) => modelOf(realisationOf(sceneOf, k))(truth)));
  const mean = meanModel(Array.from({ length: 4 }, (_, k) => modelOf(realisationOf(sceneOf, k))));
  const one = modelOf(sceneOf);
  let [withCovariance, without, chi2PerN] = [0, 0, 0];
  for (let set = 0; set < sets; set++) {
    const sky = await modelOf((values) => scenePath(sceneOf(values), 'turbulence.resolved.realisation').set(sceneOf(values), 100 + set))(truth);
    const likelihood = observed(base, sky, set);
    const judged = withScatter(inSectors(likelihood, data, scene.galaxy, { rings: 3, sectors: 8 }), drawn, 4);
    const fit = (forward: ForwardModel, own: Likelihood): Promise<Fit> => fitModel({ parameters, forward, likelihood: own, seed: 1, starts: 0, descents: 1 });
    const best = await fit(mean, judged);
    if (isInside(best)) withCovariance++;
    chi2PerN += best.chi2 / judged.residualCount / sets;
    if (isInside(await fit(one, likelihood))) without++;
  }
  return { withCovariance, without, chi2PerN };
}

/** Two parameters: 95 % of a Gaussian lies within chi2 = -2 ln 0.05. */
function isInside({ values, covariance }: Fit): boolean {
  const lower = covariance && factorCholesky(covariance, 2);
  if (!lower) return false;
  return solveLower(lower, truth.map((value, j) => value - values[j])).reduce((sum, z) => sum + z * z, 0) < -2 * Math.log(0.05);
}
