import { describe, expect, it } from 'vitest';
import { mostSobolDimensions, sobolSequence } from '../../src/math/sobol.ts';
import { needPython, pythonJson } from '../support/tools.ts';

const points = (dimensions: number, count: number, seed?: number): number[][] => {
  const sequence = sobolSequence(dimensions, seed);
  return Array.from({ length: count }, (_, k) => [...sequence.point(k)]);
};

describe('Sobol sequence', () => {
  it('begins as published', () => {
    // Joe & Kuo 2008's own program, first ten points of three dimensions (their web page, from memory).
    expect(points(3, 10)).toEqual([
      [0, 0, 0], [0.5, 0.5, 0.5], [0.75, 0.25, 0.25], [0.25, 0.75, 0.75], [0.375, 0.375, 0.625],
      [0.875, 0.875, 0.125], [0.625, 0.125, 0.875], [0.125, 0.625, 0.375], [0.1875, 0.3125, 0.9375], [0.6875, 0.8125, 0.4375],
    ]);
  });

  it('is that of scipy in every dimension', (context) => {
    needPython(context, 'scipy');
    const outside = pythonJson(
      `import sys, json; from scipy.stats import qmc\nprint(json.dumps(qmc.Sobol(int(sys.argv[1]), scramble=False).random(512).tolist()))`,
      [String(mostSobolDimensions)],
    );
    // Both are exact binary fractions of the same integers.
    expect(points(mostSobolDimensions, 512)).toEqual(outside);
  });

  it.each([undefined, 1, 2, 99])('any 2^k points from a multiple of 2^k on fill every cell of 2^k once, seed %s', (seed) => {
    const sequence = sobolSequence(20, seed);
    for (const [count, start] of [[256, 0], [256, 256], [64, 192]]) {
      for (let dimension = 0; dimension < 20; dimension++) {
        const cells = new Set(Array.from({ length: count }, (_, k) => Math.floor(sequence.point(start + k)[dimension] * count)));
        expect(cells.size).toBe(count);
      }
    }
  });

  it('scrambled stays a (0, m, 2)-net: every box of 2^a x 2^b holds one point', () => {
    for (const seed of [3, 4]) {
      const net = points(2, 256, seed);
      for (let a = 0; a <= 8; a++) {
        const boxes = new Set(net.map(([x, y]) => `${Math.floor(x * 2 ** a)}/${Math.floor(y * 2 ** (8 - a))}`));
        expect(boxes.size).toBe(256);
      }
    }
  });

  it('scrambled is uniform over seeds: the mean of each point is 1/2', () => {
    const seeds = 400;
    const mean = Array.from({ length: seeds }, (_, seed) => sobolSequence(1, seed).point(5)[0]).reduce((sum, x) => sum + x / seeds, 0);
    // Standard deviation of a uniform number over the root of the count; 4 sigma.
    expect(Math.abs(mean - 0.5)).toBeLessThan((4 * Math.sqrt(1 / 12)) / Math.sqrt(seeds));
  });

  it('has far less discrepancy than random numbers', (context) => {
    needPython(context, 'scipy');
    const discrepancy = pythonJson(
      'import sys, json; from scipy.stats import qmc\nprint(json.dumps([qmc.discrepancy(json.loads(x)) for x in [sys.stdin.read()]]))',
      [], JSON.stringify(points(4, 512, 7)),
    ) as number[];
    // Expected centred discrepancy squared of 512 random points in 4 dimensions: ((5/4)^4 - (13/12)^4)/512 = 2.1e-3 (Hickernell 1998).
    expect(discrepancy[0]).toBeLessThan(2.1e-3 / 10);
  });

  it('refuses dimensions that it has no numbers for', () => {
    expect(() => sobolSequence(mostSobolDimensions + 1)).toThrow(RangeError);
    expect(() => sobolSequence(0)).toThrow(RangeError);
  });
});
