import { describe, expect, it } from 'vitest';
import { leastSquares } from '../../src/infer/least-squares.ts';
import type { LeastSquaresOptions } from '../../src/infer/least-squares.ts';
import { randomStream } from '../../src/math/random.ts';
import { needPython, pythonJson } from '../support/tools.ts';
import { strdProblems } from '../reference/infer/strd.ts';

const f64 = (...values: number[]): Float64Array => Float64Array.from(values);
const relative = (value: number, expected: number): number => Math.abs(value - expected) / Math.abs(expected);

/** Rosenbrock's valley as two residuals: minimum 0 at (1, 1). */
const rosenbrock = async (v: Float64Array): Promise<Float64Array> => f64(10 * (v[1] - v[0] ** 2), 1 - v[0]);

describe('leastSquares on NIST StRD problems', () => {
  for (const problem of strdProblems) {
    const { name, x, y, model, certified, deviations, sumOfSquares } = problem;
    problem.starts.forEach((start, which) => {
      it(`${name} from start ${which + 1}`, async () => {
        const residuals = async (b: Float64Array): Promise<Float64Array> => f64(...x.map((t, k) => y[k] - model(b, t)));
        const result = await leastSquares(residuals, f64(...start), { central: true, tolerance: 1e-13, maxIterations: 2000 });
        expect(result.converged).toBe(true);
        // Certified to 11 digits; central differences leave about 1e-9 in the Jacobian, which the
        // poorly determined parameters of MGH09 (errors of 60-100 %) amplify.
        certified.forEach((value, j) => expect(relative(result.values[j], value), `b${j + 1}`).toBeLessThan(1e-6));
        expect(relative(result.chi2, sumOfSquares)).toBeLessThan(1e-9);
        const scatter = Math.sqrt(result.chi2 / (x.length - start.length));
        deviations.forEach((value, j) => expect(relative(result.errors[j] * scatter, value)).toBeLessThan(1e-5));
      });
    });
  }
});

describe('leastSquares within bounds', () => {
  // Minimum of 100(y - x^2)^2 + (1 - x)^2 where x <= 0.5: x = 0.5, y = 0.25, value 0.25.
  it('stops on a bound, flags it and gives no error for it', async () => {
    const result = await leastSquares(rosenbrock, f64(-1.2, 1), { upper: f64(0.5, 10), lower: f64(-2, -10) });
    expect(result.values[0]).toBe(0.5);
    expect(Math.abs(result.values[1] - 0.25)).toBeLessThan(1e-7);
    expect(relative(result.chi2, 0.25)).toBeLessThan(1e-10);
    expect(result.atBound).toEqual(['upper', false]);
    expect(result.errors[0]).toBeNaN();
    // With x held, d r/dy = 10: error 0.1 (forward differences: 1e-6).
    expect(relative(result.errors[1], 0.1)).toBeLessThan(1e-5);
  });

  it('leaves a bound it starts on when chi2 falls inwards', async () => {
    const result = await leastSquares(rosenbrock, f64(-2, -2), { lower: f64(-2, -2), upper: f64(3, 3) });
    expect(Math.abs(result.values[0] - 1)).toBeLessThan(1e-6);
    expect(Math.abs(result.values[1] - 1)).toBeLessThan(1e-6);
    expect(result.atBound).toEqual([false, false]);
  });

  it('never evaluates outside them', async () => {
    const lower = f64(0.2, 0.1);
    const upper = f64(0.9, 0.7);
    let outside = 0;
    const watched = async (v: Float64Array): Promise<Float64Array> => {
      if (v.some((value, j) => value < lower[j] || value > upper[j])) outside++;
      return rosenbrock(v);
    };
    for (const central of [false, true]) await leastSquares(watched, f64(0.9, 0.1), { lower, upper, central });
    expect(outside).toBe(0);
  });

  it('solves any linear problem in a box: the Karush-Kuhn-Tucker conditions hold', async () => {
    const random = randomStream(5, 'boxes');
    for (let trial = 0; trial < 40; trial++) {
      const A = Array.from({ length: 12 }, () => Array.from({ length: 5 }, () => random.gaussian()));
      const b = A.map(() => 3 * random.gaussian());
      const residuals = async (v: Float64Array): Promise<Float64Array> =>
        f64(...A.map((row, k) => row.reduce((sum, a, j) => sum + a * v[j], -b[k])));
      const lower = new Float64Array(5).fill(-0.5);
      const upper = new Float64Array(5).fill(0.5);
      const result = await leastSquares(residuals, new Float64Array(5), { lower, upper, tolerance: 1e-15 });
      for (let j = 0; j < 5; j++) {
        const gradient = A.reduce((sum, row, k) => sum + row[j] * result.residuals[k], 0);
        // Gradients here are of order 10; forward differences of a linear problem leave 1e-9.
        if (result.atBound[j] === 'lower') expect(gradient).toBeGreaterThan(-1e-5);
        else if (result.atBound[j] === 'upper') expect(gradient).toBeLessThan(1e-5);
        else expect(Math.abs(gradient)).toBeLessThan(1e-5);
      }
    }
  });
});

describe('leastSquares against scipy.optimize.least_squares', () => {
  it('finds the same bounded minima of a decaying wave', async (context) => {
    needPython(context, 'numpy', 'scipy');
    const t = Array.from({ length: 40 }, (_, k) => k / 4);
    const random = randomStream(9, 'waves');
    const problems = Array.from({ length: 12 }, () => {
      const truth = [2 + random.uniform(), 0.2 + 0.2 * random.uniform(), 1.5 + 0.2 * random.uniform(), random.gaussian() / 4];
      const y = t.map((x) => truth[0] * Math.exp(-truth[1] * x) * Math.cos(truth[2] * x + truth[3]) + 0.1 * random.gaussian());
      return { y, lower: [0, 0.25, 1, -0.2], upper: [2.5, 1, 2, 0.2], start: [1, 0.5, 1.6, 0.1] };
    });
    const code = `import json, sys
import numpy as np
from scipy.optimize import least_squares
d = json.load(sys.stdin); t = np.array(d['t']); out = []
for p in d['problems']:
    f = lambda v: v[0]*np.exp(-v[1]*t)*np.cos(v[2]*t+v[3]) - np.array(p['y'])
    r = least_squares(f, p['start'], bounds=(p['lower'], p['upper']), jac='3-point', xtol=1e-14, ftol=1e-14, gtol=1e-12)
    out.append({'x': list(r.x), 'chi2': 2*r.cost})
print(json.dumps(out))`;
    const expected = pythonJson(code, [], JSON.stringify({ t, problems })) as { x: number[]; chi2: number }[];
    let bound = 0;
    for (const [k, { y, lower, upper, start }] of problems.entries()) {
      const residuals = async (v: Float64Array): Promise<Float64Array> =>
        f64(...t.map((x, i) => v[0] * Math.exp(-v[1] * x) * Math.cos(v[2] * x + v[3]) - y[i]));
      const result = await leastSquares(residuals, f64(...start), { lower: f64(...lower), upper: f64(...upper), central: true, tolerance: 1e-13 });
      // scipy's interior method stops about 1e-7 short of a bound.
      expect(relative(result.chi2, expected[k].chi2)).toBeLessThan(1e-6);
      expected[k].x.forEach((value, j) => expect(Math.abs(result.values[j] - value)).toBeLessThan(1e-5));
      bound += result.atBound.filter((side) => side !== false).length;
    }
    expect(bound).toBeGreaterThan(3);
  });
});

describe('leastSquares as a job', () => {
  const run = (options: LeastSquaresOptions) => leastSquares(rosenbrock, f64(-1.2, 1), options);

  it('uses derivatives it is given', async () => {
    const jacobian = async (v: Float64Array): Promise<Float64Array[]> => [f64(-20 * v[0], -1), f64(10, 0)];
    const result = await run({ jacobian });
    expect(Math.abs(result.values[0] - 1)).toBeLessThan(1e-9);
    expect(result.evaluations).toBeLessThan((await run({})).evaluations / 2);
  });

  it('reports progress that never rises', async () => {
    const seen: number[] = [];
    await run({ onProgress: ({ chi2 }) => seen.push(chi2) });
    expect(seen.length).toBeGreaterThan(3);
    expect(seen).toEqual([...seen].sort((a, b) => b - a));
  });

  it('stops when aborted, with the reason', async () => {
    const stop = new AbortController();
    const reason = new Error('enough');
    const onProgress = ({ iteration }: { iteration: number }): void => {
      if (iteration === 2) stop.abort(reason);
    };
    await expect(run({ signal: stop.signal, onProgress })).rejects.toBe(reason);
  });

  it('says when it ran out of iterations', async () => {
    const result = await run({ maxIterations: 2 });
    expect(result.converged).toBe(false);
    expect(result.reason).toBe('iterations');
  });

  it('gives no errors where two parameters do the same', async () => {
    const result = await leastSquares(async (v) => f64(v[0] + v[1] - 1, 2 * (v[0] + v[1]) - 2.1), f64(0, 0));
    expect(result.covariance).toBeUndefined();
    expect(result.errors[0]).toBeNaN();
    // Minimum at sum = (1 + 2*2.1)/5 = 1.04, the least-squares solution of the one that counts.
    expect(Math.abs(result.values[0] + result.values[1] - 1.04)).toBeLessThan(1e-6);
  });

  it('steps back from residuals that are not finite', async () => {
    // sqrt of a negative number beyond x = 0; the minimum is at x = 0.01.
    const result = await leastSquares(async (v) => f64(Math.sqrt(v[0]) - 0.1), f64(4));
    expect(Math.abs(result.values[0] - 0.01)).toBeLessThan(1e-6);
  });

  it('ends at a minimum that is 0 at 0, and where a parameter has no effect', async () => {
    const result = await leastSquares(async (v) => f64(v[0] ** 3, v[0]), f64(1, 0));
    expect(result.converged).toBe(true);
    expect(Math.abs(result.values[0])).toBeLessThan(1e-8);
    expect(result.values[1]).toBe(0);
    expect(result.covariance).toBeUndefined();
    expect((await leastSquares(async () => f64(1, 2), f64(0))).converged).toBe(true);
  });

  it('stops where derivatives are not finite', async () => {
    await expect(leastSquares(async (v) => f64(v[0] === 1 ? 1 : NaN), f64(1))).rejects.toThrow('derivatives of parameter 1');
  });

  it('refuses a start that is out of bounds or not finite', async () => {
    await expect(run({ upper: f64(-2, 2) })).rejects.toThrow('out of bounds');
    await expect(leastSquares(async () => f64(NaN), f64(1))).rejects.toThrow('not finite');
  });
});
