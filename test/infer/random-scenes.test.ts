import { describe, expect, it } from 'vitest';
import { makeLikelihood, logLikelihood } from '../../src/infer/likelihood.ts';
import { meanModel, withScatter } from '../../src/infer/random-scenes.ts';
import { inSectors } from '../../src/infer/sector-basis.ts';
import { factorCholesky, multiplyLower } from '../../src/math/cholesky.ts';
import { randomStream } from '../../src/math/random.ts';
import { parseScene } from '../../src/scene/parse-scene.ts';
import { smallScene } from '../cli/run.ts';
import { needPython, pythonJson } from '../support/tools.ts';
import { correlatedNoise } from './correlated-noise.ts';
import { testAxes, testData } from './grids.ts';
import { coverage } from './turbulent-coverage.ts';

const { galaxy } = parseScene(smallScene, 'small.scene.yaml');

describe('sums over sectors', () => {
  it('are independent unit Gaussians for noise of the beam', () => {
    const axes = testAxes(24, 24, 24);
    const beam = { majorArcsec: 72, minorArcsec: 60, angle: 0.5 };
    const maps = correlatedNoise(axes, beam, 6, 400);
    const sectors = inSectors(makeLikelihood(testData(axes, [{ correlation: beam }])), { axes }, galaxy, { rings: 2, sectors: 6 });
    const n = sectors.residualCount;
    expect(n).toBe(12);
    const draws = maps.map((map) => sectors.residuals([map]));
    for (let a = 0; a < n; a++) {
      for (let b = 0; b <= a; b++) {
        const mean = draws.reduce((sum, draw) => sum + draw[a] * draw[b], 0) / draws.length;
        // Products of unit Gaussians scatter by 1, squares by sqrt 2; 78 of them: 4.5 sigma.
        expect(Math.abs(mean - (a === b ? 1 : 0))).toBeLessThan((4.5 * (a === b ? Math.SQRT2 : 1)) / 20);
      }
    }
  });
});

describe('a likelihood with scatter', () => {
  // Three pixels of independent noise, each its own sector (rings about the middle pixel).
  const axes = testAxes(3, 1, 100);
  const data = testData(axes, [{ values: Float64Array.of(1, -2, 0.5), noise: 0.5 }]);
  const sectors = inSectors(makeLikelihood(data), data, galaxy, { rings: 40, sectors: 4 });
  const truth = [4, 1, 0, 1, 2, 0.5, 0, 0.5, 1];
  const lower = factorCholesky(truth, 3)!;
  const random = randomStream(3, 'scatter');
  const realisations = Array.from({ length: 20_000 }, () => [multiplyLower(lower, Float64Array.from({ length: 3 }, () => random.gaussian())).map((value, k) => value + k)]);

  it('tends to the Gaussian with the covariance of noise plus scatter (scipy), about the mean of the realisations', (context) => {
    needPython(context, 'scipy');
    const judged = withScatter(sectors, realisations, 4);
    const few = meanModel(realisations.slice(0, 4).map((one) => () => Promise.resolve(one)))(new Float64Array(0));
    const code = `
import json, sys, numpy as np
from scipy import stats
c = np.array(json.loads(sys.stdin.read())).reshape(3, 3)
print(json.dumps(stats.multivariate_normal.logpdf([1, -2, 0.5], [0, 1, 2], c + 0.25 * np.eye(3))))`;
    const outside = pythonJson(code, [], JSON.stringify(truth)) as number;
    return few.then((maps) => {
      // A covariance from 20000 draws is good to 1 per cent; chi2 here is about 7.
      expect(Math.abs(logLikelihood(judged, judged.residuals(maps)) - outside)).toBeLessThan(0.1);
    });
  });

  it('lets disorder pass that noise alone would call a misfit', () => {
    const judged = withScatter(sectors, realisations.slice(0, 40), 4);
    const chi2 = (own: typeof judged): number => realisations.slice(5000, 5200).reduce((sum, [map]) => {
      const seen = { ...data, planes: [{ ...data.planes[0], values: map }] };
      const base = inSectors(makeLikelihood(seen), seen, galaxy, { rings: 40, sectors: 4 });
      const mine = own === sectors ? base : withScatter(base, realisations.slice(0, 40), 4);
      return sum + mine.residuals([Float64Array.of(0, 1, 2)]).reduce((total, value) => total + value * value, 0) / 600;
    }, 0);
    // Data without noise of their own: scatter over scatter and noise, below 1; by noise alone 28/3 = 9.3.
    expect(chi2(judged)).toBeLessThan(1.3);
    expect(chi2(sectors)).toBeGreaterThan(6);
  });
});

it('covers the truth for data made from realisations of a turbulent galaxy, and does not without (small version: 6 data sets)', async () => {
  const { withCovariance, without } = await coverage(6);
  // 3 or fewer of 6 at 95 per cent: once in 500.
  expect(withCovariance).toBeGreaterThanOrEqual(4);
  expect(without).toBeLessThan(4);
}, 300_000);
