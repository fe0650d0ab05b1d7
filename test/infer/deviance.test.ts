import { describe, expect, it } from 'vitest';
import { gaussianDeviance, logRice, riceDeviance, wrappedDeviance } from '../../src/infer/deviance.ts';
import type { Deviance } from '../../src/infer/deviance.ts';
import { besselRatio, logBesselI0 } from '../../src/math/bessel.ts';
import { needPython, pythonJson } from '../support/tools.ts';

const logDensity = ({ best, residual }: Deviance, model: number): number => best - residual(model) ** 2 / 2;

describe('deviances', () => {
  it('give back the density of scipy.stats.rice, from noise to strong signal', (context) => {
    needPython(context, 'scipy');
    const cases = [[0.3, 0, 1], [1.2, 0.4, 1], [3, 2, 1], [40, 38, 1], [4e-5, 3e-5, 1e-5], [900, 905, 1]];
    const theirs = pythonJson('import json, sys\nfrom scipy import stats\nprint(json.dumps([float(stats.rice.logpdf(p, m / s, scale=s)) for p, m, s in json.loads(sys.stdin.read())]))', [], JSON.stringify(cases)) as number[];
    cases.forEach(([value, model, sigma], k) => {
      // Rounding of ln L of up to 4e5 before it cancels.
      expect(Math.abs(logDensity(riceDeviance(value, sigma), model) - theirs[k])).toBeLessThan(1e-8);
      expect(Math.abs(logRice(value, model, sigma) - theirs[k])).toBeLessThan(1e-9);
    });
  });

  it('Rice: the residual is 0 at the likeliest model, and passes through it smoothly', () => {
    const { residual } = riceDeviance(3, 1);
    const slopes = [-1, 1].map((side) => (residual(2.8 + side * 1e-3) - residual(2.8)) / (side * 1e-3));
    expect(Math.abs(slopes[0] / slopes[1] - 1)).toBeLessThan(1e-3);
    expect(residual(0.5)).toBeGreaterThan(0);
    expect(residual(5)).toBeLessThan(0);
    expect(riceDeviance(1, 1).residual(0)).toBe(0);
  });

  it('wrapped: integrates to 1 over half a turn and knows no half turns', () => {
    for (const sigma of [0.05, 0.5, 2]) {
      const deviance = wrappedDeviance(0.7, sigma);
      const step = Math.PI / 2000;
      const sum = Array.from({ length: 2000 }, (_, k) => Math.exp(logDensity(deviance, k * step)) * step).reduce((a, b) => a + b, 0);
      // A periodic sum is exact to rounding; six half turns either side hold all but e^-40 at sigma 2.
      expect(Math.abs(sum - 1)).toBeLessThan(1e-6);
      expect(Math.abs(deviance.residual(0.4) - deviance.residual(0.4 + 3 * Math.PI))).toBeLessThan(1e-6);
    }
    // Far from the edge of half a turn it is the Gaussian.
    expect(Math.abs(wrappedDeviance(0.7, 0.05).residual(0.6) - gaussianDeviance(0.7, 0.05).residual(0.6))).toBeLessThan(1e-12);
  });
});

it('Bessel functions are those of scipy, over the change of series', (context) => {
  needPython(context, 'scipy');
  const arguments_ = [0, 1e-3, 1, 12, 29.9, 30.1, 700, 1e5];
  const theirs = pythonJson('import json, sys, numpy as np\nfrom scipy.special import ive\nx = np.array(json.loads(sys.stdin.read()))\nprint(json.dumps([list(np.log(ive(0, x)) + x), list(ive(1, x) / ive(0, x))]))', [], JSON.stringify(arguments_)) as number[][];
  arguments_.forEach((x, k) => {
    expect(Math.abs(logBesselI0(x) - theirs[0][k])).toBeLessThan(1e-13 * Math.max(1, x));
    expect(Math.abs(besselRatio(x) - theirs[1][k])).toBeLessThan(1e-13);
  });
});
