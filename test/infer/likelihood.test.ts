import { describe, expect, it } from 'vitest';
import { whitenBanded, factorBanded } from '../../src/infer/banded-cholesky.ts';
import { makeLattice, windowMeans } from '../../src/infer/lattice.ts';
import { chiSquared, logLikelihood, makeLikelihood } from '../../src/infer/likelihood.ts';
import { windowCovariance } from '../../src/infer/noise-covariance.ts';
import { beamAxes, beamPixels } from '../../src/infer/pixel-axes.ts';
import type { PixelAxes } from '../../src/infer/pixel-axes.ts';
import type { Beam } from '../../src/scene/types.ts';
import { noiseMaker } from '../../src/sky/noise.ts';
import { pixelBeam } from '../../src/sky/beam.ts';
import { randomStream } from '../../src/math/random.ts';
import { needPython, pythonJson } from '../support/tools.ts';
import { correlatedNoise } from './correlated-noise.ts';
import { testAxes, testData } from './grids.ts';

const beam = (major: number, minor: number, angle = 0): Beam => ({ majorArcsec: major, minorArcsec: minor, angle });
const relative = (value: number, expected: number): number => Math.abs(value - expected) / Math.abs(expected);

/** A disc less a hole, as a mask of foreground stars would leave. */
function disc({ nx, ny }: PixelAxes): Uint8Array {
  return Uint8Array.from({ length: nx * ny }, (_, p) => {
    const [x, y] = [p % nx, Math.floor(p / nx)];
    const hole = Math.hypot(x - nx / 3, y - ny / 3) < nx / 10;
    return Math.hypot((x - nx / 2) / nx, (y - ny / 2) / ny) < 0.47 && !hole ? 1 : 0;
  });
}

/** exp(-4 ln 2 d^2/FWHM^2) between two pixels, straight from sky offsets. */
function noiseCorrelation({ nx, wcs }: PixelAxes, { majorArcsec, minorArcsec, angle }: Beam): (p: number, q: number) => number {
  return (p, q) => {
    const [dx, dy] = [(p % nx) - (q % nx), Math.floor(p / nx) - Math.floor(q / nx)];
    const east = 3600 * (wcs.cd[0] * dx + wcs.cd[1] * dy);
    const north = 3600 * (wcs.cd[2] * dx + wcs.cd[3] * dy);
    const along = (north * Math.cos(angle) + east * Math.sin(angle)) / majorArcsec;
    const across = (east * Math.cos(angle) - north * Math.sin(angle)) / minorArcsec;
    return Math.exp(-4 * Math.LN2 * (along ** 2 + across ** 2));
  };
}

/** W^T rho W by the plain double sum. */
function denseCovariance(axes: PixelAxes, shape: Beam, unmasked: Uint8Array): number[][] {
  const { count, start, pixel, weight } = makeLattice(axes, shape, unmasked);
  const rho = noiseCorrelation(axes, shape);
  return Array.from({ length: count }, (_, a) =>
    Array.from({ length: count }, (_, b) => {
      let sum = 0;
      for (let k = start[a]; k < start[a + 1]; k++) {
        for (let l = start[b]; l < start[b + 1]; l++) sum += weight[k] * weight[l] * rho(pixel[k], pixel[l]);
      }
      return sum;
    }),
  );
}

describe('windowCovariance', () => {
  const cases: [string, PixelAxes, Beam, boolean][] = [
    ['circular beam of 2 pixels', testAxes(14, 10), beam(8, 8), false],
    ['elliptical beam, masked', testAxes(20, 24), beam(16, 10, 0.6), true],
    ['turned grid, masked', testAxes(22, 18, 4, 0.4), beam(16, 12, -1.1), true],
  ];
  for (const [name, axes, shape, masked] of cases) {
    it(`is W^T rho W: ${name}`, () => {
      const unmasked = masked ? disc(axes) : new Uint8Array(axes.nx * axes.ny).fill(1);
      const lattice = makeLattice(axes, shape, unmasked);
      const { band, entries } = windowCovariance(lattice, beamAxes(axes, shape), axes.nx);
      let worst = 0;
      denseCovariance(axes, shape, unmasked).forEach((row, a) =>
        row.forEach((value, b) => {
          if (b > a) return;
          const here = a - b <= band ? entries[a * (band + 1) + b - a + band] : 0;
          worst = Math.max(worst, Math.abs(here - value) / row[a]);
        }),
      );
      // The sum over sources stands for an integral to 3e-6; the rest is its cut-off at 1e-6.
      expect(worst).toBeLessThan(1e-5);
    });
  }
});

describe('chi2 of a true model', () => {
  const cases: [string, PixelAxes, Beam, { masked?: boolean; noiseMap?: boolean }][] = [
    ['2 pixels a beam', testAxes(32, 32), beam(8, 8), {}],
    ['3 pixels, not square', testAxes(52, 40), beam(12, 12), {}],
    ['elliptical, 3 x 5 pixels', testAxes(34, 44), beam(20, 12, 0.5), {}],
    ['elliptical, masked', testAxes(40, 36), beam(24, 14, 2), { masked: true }],
    ['8 pixels, masked, noise map', testAxes(90, 64), beam(32, 32), { masked: true, noiseMap: true }],
    ['turned grid, noise map', testAxes(44, 44, 4, 0.7), beam(20, 12, 0.5), { noiseMap: true }],
  ];
  const seeds = 200;
  for (const [name, axes, shape, { masked, noiseMap }] of cases) {
    it(`has the mean and variance of its number of residuals: ${name}`, () => {
      const { nx, ny } = axes;
      const unmasked = masked ? disc(axes) : new Uint8Array(nx * ny).fill(1);
      // A factor of six across the map, as at the edge of a primary beam.
      const rms = Float64Array.from({ length: nx * ny }, (_, p) => (noiseMap ? 1 + (5 * (p % nx)) / nx : 2));
      const truth = Float64Array.from({ length: nx * ny }, (_, p) => 10 * Math.sin(p / 7));
      const values = truth.map((value, p) => (unmasked[p] === 1 ? value : NaN));
      const likelihood = makeLikelihood(testData(axes, [{ values, noise: noiseMap ? rms : 2, correlation: shape }]));
      const n = likelihood.residualCount;
      const chi2 = correlatedNoise(axes, shape, 11, seeds).map((noise) =>
        chiSquared(likelihood.residuals([truth.map((value, p) => value - noise[p] * rms[p])])),
      );
      const mean = chi2.reduce((sum, value) => sum + value, 0) / seeds;
      const variance = chi2.reduce((sum, value) => sum + (value - mean) ** 2, 0) / (seeds - 1);
      // Four standard errors: of the mean sqrt(2n/seeds), of the variance of a chi2 distribution
      // 2n sqrt(2/seeds + 12/(n seeds)).
      expect(Math.abs(mean - n)).toBeLessThan(4 * Math.sqrt((2 * n) / seeds));
      expect(Math.abs(variance - 2 * n)).toBeLessThan(4 * 2 * n * Math.sqrt((2 + 12 / n) / seeds));
      // Points are whole; the lattice's phase is chosen so that they number about area/beam.
      const area = 16 * unmasked.reduce((sum, value) => sum + value, 0);
      expect(relative(likelihood.count, area / (1.13309003545679 * shape.majorArcsec * shape.minorArcsec))).toBeLessThan(1e-9);
      expect(relative(n, likelihood.count)).toBeLessThan(0.06);
    });
  }

  it('holds for the noise that the program itself makes', () => {
    const axes = testAxes(50, 44);
    const shape = beam(20, 12, 0.5);
    const make = noiseMaker(axes.nx, axes.ny, pixelBeam(shape, axes.wcs.cd));
    const random = randomStream(3, 'noise of a test');
    const likelihood = makeLikelihood(testData(axes, [{ correlation: shape }]));
    const n = likelihood.residualCount;
    let sum = 0;
    for (let k = 0; k < 100; k++) sum += chiSquared(likelihood.residuals([make(() => random.gaussian())])) / 100;
    // Four standard errors.
    expect(Math.abs(sum - n)).toBeLessThan(4 * Math.sqrt((2 * n) / 100));
  });
});

describe('makeLikelihood', () => {
  it('keeps what maps say: Fisher information of structures against all pixels', () => {
    const axes = testAxes(14, 14);
    const shape = beam(10, 10);
    const area = axes.nx * axes.ny;
    const rho = noiseCorrelation(axes, shape);
    const full = Array.from({ length: area }, (_, p) => Array.from({ length: area }, (_, q) => rho(p, q)));
    const dense = { size: area, band: area - 1, entries: new Float64Array(area * area) };
    full.forEach((row, p) => row.slice(0, p + 1).forEach((value, q) => (dense.entries[p * area + q - p + area - 1] = value)));
    for (let p = 0; p < area; p++) dense.entries[p * area + area - 1] += 1e-10;
    factorBanded(dense);
    const likelihood = makeLikelihood(testData(axes, [{ correlation: shape }]));
    // Share of the information left, for Gaussians of 2 and 4 beams FWHM off centre.
    const left = [2, 4].map((beams) => {
      const s = Float64Array.from({ length: area }, (_, p) =>
        Math.exp((-4 * Math.LN2 * (((p % 14) - 5.8) ** 2 + (Math.floor(p / 14) - 7.3) ** 2)) / (2.5 * beams) ** 2),
      );
      return chiSquared(likelihood.residuals([s])) / chiSquared(whitenBanded(dense, Float64Array.from(s)));
    });
    // Never more than there is; nearly all of what is wider than two beams.
    for (const share of left) expect(share).toBeLessThan(1 + 1e-6);
    expect(left[0]).toBeGreaterThan(0.97);
    expect(left[1]).toBeGreaterThan(0.97);
  });

  it('is a normalised density of the window means (scipy)', (context) => {
    needPython(context, 'numpy', 'scipy');
    const axes = testAxes(20, 22);
    const shape = beam(16, 11, 0.6);
    const unmasked = disc(axes);
    const rms = Float64Array.from(unmasked, (_, p) => 1 + 0.02 * (p % axes.nx));
    const values = correlatedNoise(axes, shape, 2, 1)[0].map((value, p) => (unmasked[p] === 1 ? value * rms[p] : NaN));
    const likelihood = makeLikelihood(testData(axes, [{ values, noise: rms, correlation: shape }]));
    const residuals = likelihood.residuals([new Float64Array(values.length)]);
    const lattice = makeLattice(axes, shape, unmasked);
    const scale = windowMeans(lattice, rms.map((value) => 1 / value)).map((mean) => 1 / mean);
    const y = windowMeans(lattice, values.map((value, p) => (unmasked[p] === 1 ? value / rms[p] : 0))).map((value, a) => value * scale[a]);
    const covariance = denseCovariance(axes, shape, unmasked).map((row, a) => row.map((value, b) => value * scale[a] * scale[b]));
    const code = `import json, sys
from scipy.stats import multivariate_normal
d = json.load(sys.stdin)
print(multivariate_normal.logpdf(d['y'], cov=d['c']))`;
    const expected = pythonJson(code, [], JSON.stringify({ y: Array.from(y), c: covariance })) as number;
    // The covariance is good to 1e-5 of its diagonal, its condition number about 30.
    expect(relative(logLikelihood(likelihood, residuals), expected)).toBeLessThan(1e-4);
  });

  it('compares pixels one by one where noise is independent', () => {
    const axes = testAxes(5, 4);
    const values = Float64Array.from({ length: 20 }, (_, p) => (p === 7 ? NaN : p));
    const rms = Float64Array.from({ length: 20 }, (_, p) => (p === 3 ? 0 : 2 + p / 10));
    const likelihood = makeLikelihood(testData(axes, [{ values, noise: rms }, { quantity: 'U', noise: 3 }]));
    const residuals = likelihood.residuals([new Float64Array(20).fill(1), new Float64Array(20).fill(-6)]);
    expect(likelihood.residualCount).toBe(18 + 20);
    expect(likelihood.count).toBe(38);
    expect(residuals[0]).toBe(-0.5);
    // Pixels 3 and 7 are out: the sixth residual is pixel 6.
    expect(residuals[5]).toBe((6 - 1) / 2.6);
    expect(residuals[18]).toBe(2);
    expect(likelihood.places[5]).toEqual({ plane: 0, pixelX: 2, pixelY: 2, slow: 1, fast: 1 });
    const logs = rms.reduce((sum, value, p) => sum + (p === 3 || p === 7 ? 0 : Math.log(value)), 20 * Math.log(3));
    expect(relative(likelihood.logNormalisation, -logs - 19 * Math.log(2 * Math.PI))).toBeLessThan(1e-14);
  });

  it('gives each residual its place in the map', () => {
    const axes = testAxes(60, 50, 4, 0.3);
    const shape = beam(20, 14, 0.4);
    const likelihood = makeLikelihood(testData(axes, [{ correlation: shape }]));
    const at = { x: 41, y: 18 };
    const spot = Float64Array.from({ length: 3000 }, (_, p) => (p % 60 === at.x - 1 && Math.floor(p / 60) === at.y - 1 ? 100 : 0));
    const residuals = likelihood.residuals([spot]);
    const total = chiSquared(residuals);
    const near = likelihood.places.reduce(
      (sum, { pixelX, pixelY }, k) => sum + (Math.hypot(pixelX - at.x, pixelY - at.y) < 10 ? residuals[k] ** 2 : 0), 0,
    );
    // 10 pixels are two beams here.
    expect(near / total).toBeGreaterThan(0.9);
  });

  it('treats a correlation narrower than a pixel as none', () => {
    const axes = testAxes(6, 6);
    expect(beamPixels(axes, beam(3, 3))).toBeLessThan(1);
    expect(makeLikelihood(testData(axes, [{ correlation: beam(3, 3) }])).residualCount).toBe(36);
  });

  it('refuses data with nothing in them and models that do not fit them', () => {
    const axes = testAxes(8, 8);
    const blank = new Float64Array(64).fill(NaN);
    expect(() => makeLikelihood(testData(axes, [{ values: blank }]))).toThrow('every pixel of a map is blank or masked');
    expect(() => makeLikelihood(testData(axes, [{ values: blank, correlation: beam(8, 8) }]))).toThrow('smaller than one beam');
    const likelihood = makeLikelihood(testData(axes, [{}]));
    expect(() => likelihood.residuals([])).toThrow('0 maps for 1 planes');
    expect(() => likelihood.residuals([new Float64Array(63)])).toThrow('63 pixels');
    expect(() => likelihood.residuals([blank])).toThrow('Map 1 of the model is NaN at pixel 0');
  });
});
