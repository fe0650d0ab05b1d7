import { describe, expect, it } from 'vitest';
import { boundLogVolume, boundPoints, drawFromBound, radius2 } from '../../src/infer/ellipsoids.ts';
import { equalWeights, evidenceOf, fromPrior } from '../../src/infer/evidence.ts';
import { mergeNested, runNested } from '../../src/infer/nested.ts';
import type { NestedState } from '../../src/infer/nested.ts';
import { covarianceOf, meanOf } from '../../src/math/moments.ts';
import { randomStream } from '../../src/math/random.ts';
import { eggBox, gaussianBox, gaussianShells } from './known-posteriors.ts';
import type { KnownEvidence } from './known-posteriors.ts';

const cases: readonly (readonly [KnownEvidence, 'bound' | 'slices' | 'auto', number])[] = [
  [gaussianBox(2), 'bound', 1],
  [gaussianBox(5), 'auto', 2],
  [gaussianShells(2), 'slices', 3],
  [eggBox, 'slices', 5],
];

describe('runNested', () => {
  it.each(cases.map(([problem, moves, seed]) => ({ ...problem, problem, moves, seed })))('has the known ln Z within 4 sigma of its own error: $name, $moves', async ({ problem, moves, seed }) => {
    const result = await runNested({ likelihood: problem.likelihood, parameters: problem.parameters, seed, livePoints: 80, moves });
    expect(result.converged).toBe(true);
    expect(Math.abs(result.logEvidence - problem.logEvidence) / result.error).toBeLessThan(4);
    // sqrt(H/N) is the textbook error (Skilling 2006, eq. 18); the scatter of 200 simulations is 5 per cent: 4 of them.
    expect(Math.abs(result.error / Math.sqrt(result.information / 80) - 1)).toBeLessThan(0.25);
  });

  it('gives posterior weights: mean and covariance of a Gaussian', async () => {
    const { likelihood } = gaussianBox(2);
    const { points, weights, effectiveSamples } = await runNested({ likelihood, parameters: 2, seed: 8, livePoints: 150 });
    const values = points.map(({ point }) => point.map((u) => 20 * u - 10));
    const mean = meanOf(values, weights);
    const covariance = covarianceOf(values, mean, weights);
    const error = 1 / Math.sqrt(effectiveSamples);
    for (const value of mean) expect(Math.abs(value)).toBeLessThan(4 * error);
    expect(Math.abs(covariance[0] - 1)).toBeLessThan(4 * Math.SQRT2 * error);
    expect(Math.abs(covariance[1])).toBeLessThan(4 * error);
  });

  it('merges runs of different seeds: same ln Z, smaller error', async () => {
    const { likelihood, logEvidence } = gaussianBox(2);
    const runs = await Promise.all([1, 2, 3, 4].map((seed) => runNested({ likelihood, parameters: 2, seed, livePoints: 60 })));
    const merged = mergeNested(runs);
    expect(Math.abs(merged.logEvidence - logEvidence) / merged.error).toBeLessThan(4);
    // Four runs: half the error; both carry 5 per cent.
    expect(merged.error / runs[0].error).toBeGreaterThan(0.35);
    expect(merged.error / runs[0].error).toBeLessThan(0.7);
  });

  it.each(['bound', 'slices'] as const)('goes on from a checkpoint bit for bit (%s)', async (moves) => {
    const problem = moves === 'bound' ? gaussianBox(2) : gaussianShells(2);
    const request = { likelihood: problem.likelihood, parameters: 2, seed: 6, livePoints: 60, moves };
    const states: string[] = [];
    const whole = await runNested({ ...request, onCheckpoint: (state) => states.push(JSON.stringify(state)) });
    for (const text of [states[3], states[Math.floor(states.length / 2)], states[states.length - 1]]) {
      const resumed = await runNested({ ...request, resume: JSON.parse(text) as NestedState });
      expect(resumed).toEqual(whole);
    }
  });

  it('does not depend on who evaluates: one by one or together', async () => {
    const { likelihood } = gaussianBox(2);
    const request = { parameters: 2, seed: 3, livePoints: 50 };
    const apart = await runNested({ ...request, likelihood: async (points) => (await Promise.all(points.map((one) => likelihood([one])))).map((values) => values[0]) });
    expect(apart).toEqual(await runNested({ ...request, likelihood }));
  });

  it('gives a limit, not an answer, where evaluations run out; throws for too few live points', async () => {
    const { likelihood } = gaussianBox(5);
    expect((await runNested({ likelihood, parameters: 5, seed: 1, livePoints: 100, maxEvaluations: 500 })).converged).toBe(false);
    await expect(runNested({ likelihood, parameters: 5, seed: 1, livePoints: 8 })).rejects.toThrow('12 are needed');
  });
});

describe('evidenceOf', () => {
  it('counts ties one after another: a flat likelihood has ln Z = its value', () => {
    const points = Array.from({ length: 50 }, () => ({ point: [0.5], logLikelihood: -3, birth: fromPrior }));
    const { logEvidence, information } = evidenceOf(points);
    // The volume left after the last of 50 is e^-4.5: 1.1 per cent.
    expect(Math.abs(logEvidence + 3)).toBeLessThan(0.012);
    expect(Math.abs(information)).toBeLessThan(0.012);
  });

  it('resamples in proportion to weight', () => {
    const drawn = equalWeights(['a', 'b'], [0.25, 0.75], 400, 1);
    expect(drawn.filter((name) => name === 'a').length).toBe(100);
  });
});

describe('boundPoints', () => {
  const random = randomStream(2, 'two discs');
  const disc = (x: number): number[] => {
    const [r, angle] = [0.1 * Math.sqrt(random.uniform()), 2 * Math.PI * random.uniform()];
    return [x + r * Math.cos(angle), 0.5 + r * Math.sin(angle)];
  };
  const points = Array.from({ length: 400 }, (_, k) => disc(k % 2 ? 0.25 : 0.75));
  const logArea = Math.log(2 * Math.PI * 0.01);
  const bound = boundPoints(points, logArea);

  it('finds two discs apart, and holds them without much more', () => {
    for (const point of points) expect(Math.min(...bound.map((one) => radius2(one, point)))).toBeLessThanOrEqual(1);
    expect(bound.length).toBeGreaterThanOrEqual(2);
    expect(boundLogVolume(bound) - logArea).toBeLessThan(Math.log(2));
  });

  it('draws uniformly, also where ellipsoids overlap', () => {
    const one = { centre: [0, 0], lower: [1, 0, 0, 1], logVolume: Math.log(Math.PI) };
    const other = { ...one, centre: [1, 0] };
    const draws = Array.from({ length: 4000 }, () => drawFromBound([one, other], random));
    const lens = draws.filter((p) => radius2(one, p) <= 1 && radius2(other, p) <= 1).length / draws.length;
    // Lens of two unit circles one radius apart: 2 pi/3 - sqrt(3)/2 (closed form).
    const area = (2 * Math.PI) / 3 - Math.sqrt(3) / 2;
    const share = area / (2 * Math.PI - area);
    expect(Math.abs(lens - share)).toBeLessThan(4 * Math.sqrt((share * (1 - share)) / draws.length));
  });
});
