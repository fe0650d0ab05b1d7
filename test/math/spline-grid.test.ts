import { expect, test } from 'vitest';
import { randomStream } from '../../src/math/random.ts';
import { evaluateGrid, interpolateGrid } from '../../src/math/spline-grid.ts';
import type { AxisEnds } from '../../src/math/spline-line.ts';
import { needPython, pythonJson } from '../support/tools.ts';

// One axis at a time is set against scipy's CubicSpline; the other is a product of a constant.
const reference = `
import json, sys, numpy as np
from scipy.interpolate import CubicSpline
given = json.load(sys.stdin)
out = []
for case in given:
    f, u = np.array(case['f']), np.array(case['u'])
    n = len(f)
    ends = case['ends']
    if ends == 'periodic':
        spline = CubicSpline(np.arange(n + 1), np.append(f, f[0]), bc_type='periodic')
        u = u % n
    elif ends == 'free':
        spline = CubicSpline(np.arange(n), f, bc_type='not-a-knot')
    else:
        low = (1, 0.0) if ends == 'even' else (2, 0.0)
        # The end condition "not-a-knot" cannot be mixed with another: mirror the samples instead.
        mirrored = np.concatenate([f[:0:-1] * (1 if ends == 'even' else -1), f])
        spline = CubicSpline(np.arange(-(n - 1), n), mirrored, bc_type='not-a-knot')
    out.append([spline(u, order).tolist() for order in range(3)])
print(json.dumps(out))
`;

const cases = (['periodic', 'free', 'even', 'odd'] as const).flatMap((ends) => [4, 5, 7, 24].map((points) => ({ ends, points })));

test('along each axis the spline and its derivatives are those of scipy', (context) => {
  needPython(context, 'scipy', 'numpy');
  const stream = randomStream(5, 'spline');
  const given = cases.map(({ ends, points }) => {
    const f = Array.from({ length: points }, (_, k) => (ends === 'odd' && k === 0 ? 0 : stream.gaussian()));
    const u = Array.from({ length: 40 }, () => stream.uniform() * (ends === 'periodic' ? 3 * points - points : points - 1));
    return { ends, f, u };
  });
  const wanted = pythonJson(reference, [], JSON.stringify(given)) as number[][][];
  let worst = 0;
  given.forEach(({ ends, f, u }, index) => {
    for (const axis of [0, 1]) {
      const shape = axis === 0 ? [f.length, 5] : [5, f.length];
      const values = Array.from({ length: 5 * f.length }, (_, k) => f[axis === 0 ? Math.floor(k / 5) : k % f.length]);
      const grid = interpolateGrid('test', values, shape, axis === 0 ? [ends, 'free'] : ['free', ends]);
      u.forEach((at, k) => {
        for (let order = 0; order < 3; order++) {
          const value = axis === 0 ? evaluateGrid(grid, [order, 0], at, 1.7) : evaluateGrid(grid, [0, order], 1.7, at);
          worst = Math.max(worst, Math.abs(value - wanted[index][order][k]));
        }
      });
    }
  });
  // Samples are of order 1, second derivatives of order 10: rounding of the two solutions.
  expect(worst).toBeLessThan(2e-13 * 10);
});

test('in three axes a product of cubics is met between and half a cell beyond the samples', () => {
  // Free ends make one cubic of a cubic: de Boor 1978, ch. IV. Stored to 32 bits: relative rounding 6e-8.
  const f = (x: number, y: number, z: number): number => (x ** 3 - 2 * x + 1) * (y * y + 3) * (z ** 3 / 40 + z + 2);
  const [nx, ny, nz] = [6, 5, 9];
  const values = Float64Array.from({ length: nx * ny * nz }, (_, k) => f(Math.floor(k / (ny * nz)) / 2, (Math.floor(k / nz) % ny) - 2, (k % nz) / 3));
  const grid = interpolateGrid('cubic', values, [nx, ny, nz], ['free', 'free', 'free']);
  const stream = randomStream(2, 'points');
  const scale = Math.max(...values.map(Math.abs));
  for (let k = 0; k < 200; k++) {
    const [u, v, w] = [nx, ny, nz].map((n) => stream.uniform() * n - 0.5);
    expect(Math.abs(evaluateGrid(grid, [0, 0, 0], u, v, w) - f(u / 2, v - 2, w / 3))).toBeLessThan(2e-6 * scale);
    const slope = ((3 * (u / 2) ** 2 - 2) / 2) * ((v - 2) ** 2 + 3) * ((w / 3) ** 3 / 40 + w / 3 + 2);
    expect(Math.abs(evaluateGrid(grid, [1, 0, 0], u, v, w) - slope)).toBeLessThan(4e-6 * scale);
  }
});

test('a smooth function is met to the fourth order of the step', () => {
  const error = (n: number): number => {
    const ends: AxisEnds[] = ['even', 'periodic'];
    const f = (r: number, phi: number): number => Math.exp(-r * r) * Math.cos(phi);
    const values = Array.from({ length: n * n }, (_, k) => f((2 * Math.floor(k / n)) / (n - 1), (2 * Math.PI * (k % n)) / n));
    const grid = interpolateGrid('smooth', values, [n, n], ends);
    let worst = 0;
    for (let k = 0; k < 300; k++) {
      const [r, phi] = [(k / 300) * 2, (k * 2.399) % (2 * Math.PI)];
      worst = Math.max(worst, Math.abs(evaluateGrid(grid, [0, 0], (r / 2) * (n - 1), (phi / (2 * Math.PI)) * n) - f(r, phi)));
    }
    return worst;
  };
  const order = Math.log2(error(32) / error(64));
  expect(order).toBeGreaterThan(3.7);
});

test('samples that fit no grid are refused', () => {
  expect(() => interpolateGrid('x', new Float64Array(12), [3, 4], ['free', 'free'])).toThrow('3 samples');
  expect(() => interpolateGrid('x', new Float64Array(12), [4, 4], ['free', 'free'])).toThrow('12 samples are no grid of 4 x 4');
});
