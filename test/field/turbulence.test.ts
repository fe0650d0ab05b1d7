import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { expect, test } from 'vitest';
import { drawTurbulence, type TurbulenceDraw, type TurbulenceGrids } from '../../src/field/turbulence.ts';
import { correlationShare, unresolvedShare, verticalWeight } from '../../src/field/turbulence-spectrum.ts';
import { writeNpy } from '../../src/files/npy.ts';
import { randomStream } from '../../src/math/random.ts';
import { evaluateGrid, type SplineGrid } from '../../src/math/spline-grid.ts';
import { inFolder, needPython, pythonJson } from '../support/tools.ts';

const kolmogorov: TurbulenceDraw = { seed: 7, realisation: 0, cells: 64, slope: 11 / 3, first: 3, last: 64 / 3, verticalRatio: 1 };

/** B of a box of side 1 at a point counted in samples. */
function fieldAt({ potential: [ax, ay, az] }: TurbulenceGrids, u: number, v: number, w: number): readonly [number, number, number] {
  const cells = ax.axes[0].points;
  const slope = (grid: SplineGrid, ...orders: number[]): number => cells * evaluateGrid(grid, orders, u, v, w);
  return [slope(az, 0, 1, 0) - slope(ay, 0, 0, 1), slope(ax, 0, 0, 1) - slope(az, 1, 0, 0), slope(ay, 1, 0, 0) - slope(ax, 0, 1, 0)];
}

/** rms of each component over random points. */
function rmsOf(grids: TurbulenceGrids, count = 40000): number[] {
  const stream = randomStream(1, 'places');
  const cells = grids.potential[0].axes[0].points;
  const sums = [0, 0, 0];
  for (let k = 0; k < count; k++) fieldAt(grids, cells * stream.uniform(), cells * stream.uniform(), cells * stream.uniform()).forEach((b, axis) => (sums[axis] += (b * b) / count));
  return sums.map(Math.sqrt);
}

/** The field between the points too, on twice as many points along each axis. */
function sampled(grids: TurbulenceGrids): Float64Array {
  const side = 2 * grids.potential[0].axes[0].points;
  const values = new Float64Array(3 * side ** 3);
  for (let at = 0; at < side ** 3; at++) {
    const index = [Math.floor(at / (side * side)), Math.floor(at / side) % side, at % side];
    fieldAt(grids, index[0] / 2, index[1] / 2, index[2] / 2).forEach((b, axis) => (values[axis * side ** 3 + at] = b));
  }
  return values;
}

/** The coefficients of the potential over one period. */
function inner({ potential }: TurbulenceGrids): Float64Array {
  const cells = potential[0].axes[0].points;
  const stored = cells + 3;
  return Float64Array.from({ length: 3 * cells ** 3 }, (_, at) => {
    const index = [Math.floor(at / (cells * cells)) % cells, Math.floor(at / cells) % cells, at % cells];
    return potential[Math.floor(at / cells ** 3)].coefficients[((index[0] + 1) * stored + index[1] + 1) * stored + index[2] + 1];
  });
}

test('numpy finds the slope, the range and no part along k', (context) => {
  needPython(context, 'numpy');
  const code = `
import numpy as np, json, sys
first, last = float(sys.argv[2]), float(sys.argv[3])
b = np.load(sys.argv[1])
n = b.shape[1]
f = np.fft.fftn(b, axes=(1, 2, 3)) / n**3
k = np.fft.fftfreq(n, 1 / n)
k = np.array(np.meshgrid(k, k, k, indexing='ij'))
size = np.sqrt((k**2).sum(0))
power = (np.abs(f)**2).sum(0)
inside = (size >= first) & (size <= last)
edges = np.geomspace(first, last, 9)
logs = []
for a, z in zip(edges[:-1], edges[1:]):
    shell = (size >= a) & (size < z)
    # Mean power of a shell at the mean logarithm of its wavenumbers.
    logs.append((np.log(size[shell]).mean(), np.log(power[shell].mean())))
slope = np.polyfit(*zip(*logs), 1)[0]
print(json.dumps({'slope': slope, 'outside': power[~inside].sum() / power.sum(), 'variance': power.sum()}))
`;
  // Coefficients of A are waves across k, and their curl, wave by wave, is the field that was sampled.
  const coefficients = `
import numpy as np, json, sys
a = np.load(sys.argv[1]).astype(float)
n = a.shape[1]
f = np.fft.fftn(a, axes=(1, 2, 3)) / n**3
line = np.fft.fftfreq(n, 1 / n)
f = f * (np.sinc(line / n)**4)[:, None, None] * (np.sinc(line / n)**4)[None, :, None] * (np.sinc(line / n)**4)[None, None, :]
k = np.array(np.meshgrid(line, line, line, indexing='ij'))
b = 2j * np.pi * np.cross(k, f, axis=0)
size = np.sqrt((k**2).sum(0))
worst = lambda v: (np.abs((k * v).sum(0)) / np.maximum(size, 1)).max() / np.abs(v).max()
print(json.dumps({'gauge': worst(f), 'divergence': worst(b), 'variance': (np.abs(b)**2).sum()}))
`;
  inFolder((folder) => {
    for (const slope of [11 / 3, 5]) {
      const draw = { ...kolmogorov, cells: 32, first: 2, last: 32 / 3, slope };
      const grids = drawTurbulence(draw);
      const path = join(folder, 'b.npy');
      writeFileSync(path, writeNpy(sampled(grids), [3, 64, 64, 64]));
      const seen = pythonJson(code, [path, String(draw.first), String(draw.last)]) as Record<string, number>;
      expect(Math.abs(seen.slope + slope)).toBeLessThan(0.05);
      // Images of the shortest waves beyond the spline's Nyquist wavenumber, 1 per cent of their power and less.
      expect(seen.outside).toBeLessThan(3e-3);
      writeFileSync(path, writeNpy(inner(grids), [3, 32, 32, 32]));
      const waves = pythonJson(coefficients, [path]) as Record<string, number>;
      // Projection at the rounding of 32 bits, the curl at that of 64.
      expect(waves.gauge).toBeLessThan(1e-6);
      expect(waves.divergence).toBeLessThan(1e-14);
      expect(Math.abs(seen.variance / waves.variance - 1)).toBeLessThan(3e-3);
    }
  });
}, 60000);

test('the rms of the ensemble is 1 within one per cent, and the field has no preferred axis', () => {
  const draws = Array.from({ length: 4 }, (_, realisation) => rmsOf(drawTurbulence({ ...kolmogorov, first: 8, realisation })));
  const means = [0, 1, 2].map((axis) => Math.sqrt(draws.reduce((sum, rms) => sum + rms[axis] ** 2 / draws.length, 0)));
  // 4 boxes of 8³ outer scales, 40000 places each: 0.3 per cent of sampling error.
  for (const rms of means) expect(Math.abs(rms - 1)).toBeLessThan(0.01);
});

test.each([0.5, 0.7, 1.5, 2.5])('the rms along z is %f of that across, as asked for', (verticalRatio) => {
  const draws = Array.from({ length: 3 }, (_, realisation) => rmsOf(drawTurbulence({ ...kolmogorov, cells: 32, first: 5, last: 32 / 3, realisation, verticalRatio }), 20000));
  const mean = (axis: number): number => Math.sqrt(draws.reduce((sum, rms) => sum + rms[axis] ** 2 / draws.length, 0));
  expect(Math.abs(mean(2) / Math.sqrt((mean(0) ** 2 + mean(1) ** 2) / 2) / verticalRatio - 1)).toBeLessThan(0.03);
  expect(Math.abs(Math.sqrt((mean(0) ** 2 + mean(1) ** 2) / 2) - 1)).toBeLessThan(0.02);
});

test('weights for rms ratios follow the angular means of the projection', () => {
  // Means over directions of n_x² n_y² and the like, by quadrature over a sphere.
  for (const ratio of [0.5, 1, 2]) {
    const w = verticalWeight(ratio) ** 2;
    let [plane, vertical, count] = [0, 0, 0];
    for (let i = 0; i < 200; i++) {
      for (let j = 0; j < 100; j++) {
        const [mu, phi] = [-1 + (2 * i + 1) / 200, (2 * Math.PI * j) / 100];
        const n = [Math.sqrt(1 - mu * mu) * Math.cos(phi), Math.sqrt(1 - mu * mu) * Math.sin(phi), mu];
        const t = n.map((a, p) => n.map((b, q) => (p === q ? 1 : 0) - a * b));
        const variance = (axis: number): number => t[axis].reduce((sum, value, q) => sum + value * value * (q === 2 ? w : 1), 0);
        plane += (variance(0) + variance(1)) / 2;
        vertical += variance(2);
        count++;
      }
    }
    expect(count).toBe(20000);
    expect(Math.abs(Math.sqrt(vertical / plane) / ratio - 1)).toBeLessThan(1e-4);
  }
  expect(Math.abs(verticalWeight(1) - 1)).toBeLessThan(5e-13);
});

test('mean B_z along lines scatters as a solenoidal field does, not as a scalar one', () => {
  // checks.json 9.grf.sol and 9.grf.scalar, for k1/k0 = 20/3 and slope 11/3: d_eff = 0.4003 and 0.2669 outer scales.
  const [lines, cells] = [400, 64];
  let [variance, square] = [0, 0];
  const draws = 5;
  for (let realisation = 0; realisation < draws; realisation++) {
    const grids = drawTurbulence({ ...kolmogorov, first: 3.2, last: 64 / 3, realisation });
    const stream = randomStream(3, 'lines', realisation);
    for (let line = 0; line < lines; line++) {
      const [u, v] = [cells * stream.uniform(), cells * stream.uniform()];
      let mean = 0;
      for (let k = 0; k < cells; k++) {
        const [, , bz] = fieldAt(grids, u, v, k);
        mean += bz / cells;
        square += bz * bz / cells / lines / draws;
      }
      variance += (mean * mean) / lines / draws;
    }
  }
  const effective = (3.2 * variance) / square;
  // 5 boxes of about 3.2² independent lines: 20 per cent; a scalar field lies 33 per cent lower.
  expect(Math.abs(effective / 0.4003 - 1)).toBeLessThan(0.2);
});

test('the correlation length along the line of sight is that of checks.json 9.Lc', () => {
  // 9.Lc.r1e-06, third number: longitudinal two-sided length of a wide range is 0.30003 L_max; 0.3 for an endless one.
  expect(Math.abs(correlationShare(11 / 3) - 0.3)).toBeLessThan(1e-12);
  // Monin & Yaglom 1975: (3/2) (L/2) ∫ E/k dk / ∫ E dk · L-units, by midpoint sums over k = 1 … 1e6 in E ∝ k^(2 - slope).
  for (const slope of [11 / 3, 4.5]) {
    let [weighted, total] = [0, 0];
    const steps = 20000;
    for (let k = 0; k < steps; k++) {
      const x = ((k + 0.5) / steps) * Math.log(1e9);
      weighted += Math.exp((2 - slope) * x);
      total += Math.exp((3 - slope) * x);
    }
    expect(Math.abs((0.75 * weighted) / total / correlationShare(slope) - 1)).toBeLessThan(1e-4);
  }
  expect(Math.abs(unresolvedShare({ slope: 11 / 3, first: 2, last: 16 }) - (8 ** (-2 / 3)))).toBeLessThan(5e-13);
});

test('a field is the same wherever it is drawn, another for another seed or realisation, and finer grids only add waves', () => {
  const draw = { ...kolmogorov, cells: 16, first: 2, last: 16 / 3 };
  const grids = drawTurbulence(draw);
  expect(drawTurbulence(draw)).toEqual(grids);
  const at = (other: TurbulenceDraw, scale = 1): number => fieldAt(drawTurbulence(other), 3.3 * scale, 4.1 * scale, 9.2 * scale)[0];
  const values = [at(draw), at({ ...draw, realisation: 1 }), at({ ...draw, seed: 8 })];
  expect(new Set(values).size).toBe(3);
  // Same waves on a finer grid: the field is the same but for the images of the shortest waves.
  const fine = { ...draw, cells: 64 };
  expect(Math.abs(at(fine, 4) - values[0])).toBeLessThan(0.1);
  const [coarseScale, fineScale] = [draw, fine].map((one) => rmsOf(drawTurbulence(one), 3000)[0]);
  expect(Math.abs(fineScale / coarseScale - 1)).toBeLessThan(0.02);
});

test.each([-0.7, 0, 0.9])('fluctuations of n_e go with the strength of the field as asked: %f', (correlation) => {
  let [sum, square, product, strength, strengthSquare] = [0, 0, 0, 0, 0];
  const stream = randomStream(4, 'places');
  const [draws, count] = [3, 15000];
  for (let realisation = 0; realisation < draws; realisation++) {
    const grids = drawTurbulence({ ...kolmogorov, cells: 32, first: 4, last: 32 / 3, realisation, electronCorrelation: correlation });
    for (let k = 0; k < count; k++) {
      // At the points of the grid, where the two were joined.
      const point = [0, 1, 2].map(() => Math.floor(32 * stream.uniform())) as unknown as [number, number, number];
      const [bx, by, bz] = fieldAt(grids, ...point);
      const g = evaluateGrid(grids.electrons as SplineGrid, [0, 0, 0], ...point);
      const q = Math.cbrt((bx * bx + by * by + bz * bz) / 3);
      sum += g;
      square += g * g;
      product += g * q;
      strength += q;
      strengthSquare += q * q;
    }
  }
  const n = draws * count;
  const [mean, variance] = [sum / n, square / n - (sum / n) ** 2];
  expect(Math.abs(mean)).toBeLessThan(0.1);
  expect(Math.abs(variance - 1)).toBeLessThan(0.1);
  const coefficient = (product / n - (mean * strength) / n) / Math.sqrt(variance * (strengthSquare / n - (strength / n) ** 2));
  expect(Math.abs(coefficient - correlation)).toBeLessThan(0.05);
});
