import { describe, expect, it } from 'vitest';
import { arnoldi } from '../../src/math/arnoldi.ts';
import { naturalSpline } from '../../src/math/natural-spline.ts';
import { randomStream } from '../../src/math/random.ts';
import { bandOf, multiplySparse, sparseFromEntries } from '../../src/math/sparse.ts';
import { needPython, pythonJson } from '../support/tools.ts';

const size = 60;
const random = randomStream(5, 'arnoldi');
const entries = Array.from({ length: 600 }, () => ({ row: Math.floor(random.uniform() * size), column: Math.floor(random.uniform() * size), value: random.gaussian() }));
const matrix = sparseFromEntries(size, entries.map(({ row }) => row), entries.map(({ column }) => column), entries.map(({ value }) => value));
const start = Float64Array.from({ length: size }, () => random.gaussian());

describe('Arnoldi’s method', () => {
  it('finds the eigenvalues that scipy finds, complex pairs included', (context) => {
    needPython(context, 'scipy', 'numpy');
    const pairs = arnoldi((x) => multiplySparse(matrix, x), start, size);
    const expected = pythonJson('import sys, json, numpy as np\nd = json.load(sys.stdin)\nm = np.zeros((60, 60))\nfor e in d: m[e["row"], e["column"]] += e["value"]\nv = np.linalg.eigvals(m)\nprint(json.dumps([[z.real, z.imag] for z in v if z.imag > -1e-12]))', [], JSON.stringify(entries)) as [number, number][];
    expect(pairs).toHaveLength(expected.length);
    for (const [real, imaginary] of expected) {
      const nearest = Math.min(...pairs.map((pair) => Math.hypot(pair.real - real, pair.imaginary - imaginary)));
      // The whole space is spanned: what is left is rounding times the eigenvalues' condition.
      expect(nearest).toBeLessThan(1e-9);
    }
  });

  it('tells the residual of each pair truly', () => {
    for (const { real, imaginary, vector: [re, im], residual } of arnoldi((x) => multiplySparse(matrix, x), start, 20)) {
      const [mapRe, mapIm] = [multiplySparse(matrix, re), multiplySparse(matrix, im)];
      const left = re.reduce((sum, _, k) => sum + (mapRe[k] - real * re[k] + imaginary * im[k]) ** 2 + (mapIm[k] - real * im[k] - imaginary * re[k]) ** 2, 0);
      expect(Math.abs(Math.sqrt(left) - residual)).toBeLessThan(1e-10);
    }
  });

  it('stops where the space is closed', () => {
    const pairs = arnoldi((x) => x.map((value) => 3 * value), Float64Array.of(1, 2, 2), 3);
    expect(pairs).toHaveLength(1);
    expect(Math.abs(pairs[0].real - 3)).toBeLessThan(1e-14);
  });
});

describe('sparse matrices', () => {
  it('add entries of one place, and know their band', () => {
    const small = sparseFromEntries(3, [2, 0, 0, 2], [0, 1, 1, 2], [4, 1, 2, 5]);
    expect(Array.from(multiplySparse(small, Float64Array.of(1, 10, 100)))).toEqual([30, 0, 504]);
    expect(bandOf(small)).toEqual({ below: 2, above: 1 });
  });
});

it('a natural spline is scipy’s', (context) => {
  needPython(context, 'scipy', 'numpy');
  const x = [0, 0.4, 1, 1.7, 3, 4.5];
  const y = [0, 2, 1, 4, 3, 3.5];
  const at = [-1, 0, 0.2, 0.9, 1, 2.2, 4.4, 4.5, 6];
  const curve = naturalSpline(x, y);
  const expected = pythonJson('import sys, json\nfrom scipy.interpolate import CubicSpline\nd = json.load(sys.stdin)\ns = CubicSpline(d["x"], d["y"], bc_type="natural")\nprint(json.dumps([float(s(min(max(a, d["x"][0]), d["x"][-1]))) for a in d["at"]]))', [], JSON.stringify({ x, y, at })) as number[];
  at.forEach((value, k) => expect(Math.abs(curve.value(value) - expected[k])).toBeLessThan(1e-12 * 4));
});
