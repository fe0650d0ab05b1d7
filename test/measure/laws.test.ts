import { expect, test } from 'vitest';
import { randomStream } from '../../src/math/random.ts';
import { laws, sumsOfTwo } from '../../src/measure/laws/index.ts';
import type { Law } from '../../src/measure/laws/types.ts';
import { cubeInMemory } from '../../src/sky/cube-source.ts';
import { regionSpectrum, sumRegions } from '../../src/measure/region-spectrum.ts';
import { checkRow } from '../reference/check-rows.ts';
import { lawRows, twoSlabRows } from '../reference/laws.ts';
import { relativeError } from '../sky/compare.ts';

function lawNamed(name: string): Law {
  const law = laws.find((one) => one.name === name);
  if (!law) throw new Error(`no law ${name}`);
  return law;
}

test('every law gives the published values', () => {
  for (const { id, law, values, lambda2, at = 0, hasAngle } of lawRows) {
    const { re, im } = lawNamed(law).value(lambda2, [1, 0, ...values]);
    const row = checkRow(id);
    // What the rows state of themselves, but for the smallest: e^-9.7 of numbers near 1.
    expect(Math.abs(Math.hypot(re, im) - row[at]), `${law} ${id}`).toBeLessThan(law === 'exponential-disc' ? 1e-8 : 1e-9);
    if (hasAngle) expect(Math.abs(Math.sin(Math.atan2(im, re) / 2 - row[1])), id).toBeLessThan(1e-9);
  }
  // A uniform screen (no row) turns by 2 RM lambda^2 and keeps P. Two slabs follow below: nothing is left out.
  const { re, im } = lawNamed('thin-screen').value(0.0441, [1, 0, 10]);
  expect(Math.hypot(re - Math.cos(0.882), im - Math.sin(0.882))).toBeLessThan(1e-15);
  expect([...new Set([...lawRows.map(({ law }) => law), 'thin-screen', 'two-slabs'])].sort()).toEqual(laws.map(({ name }) => name).sort());
});

test('two slabs give the published Q and U; an asymmetric slab is one of them without near emission', () => {
  for (const [id, lambda2] of twoSlabRows) {
    const { re, im } = lawNamed('two-slabs').value(lambda2, [0.6, 0.3, 40, 0.4, 1, -25]);
    [re, im, Math.hypot(re, im)].forEach((value, k) => expect(Math.abs(value - checkRow(id)[k]), id).toBeLessThan(1e-9));
    const dark = lawNamed('two-slabs').value(lambda2, [0.6, 0.3, 40, 0, 1, -25]);
    const asymmetric = lawNamed('asymmetric-slab').value(lambda2, [0.6, 0.3, -25 + 20, 40]);
    expect(Math.abs(dark.re - asymmetric.re) + Math.abs(dark.im - asymmetric.im)).toBeLessThan(1e-12);
  }
});

test('a slab vanishes where R lambda^2 is pi, and laws meet where they must', () => {
  const { re, im } = lawNamed('burn-slab').value(0.06283185307179587, [1, 0, 50]);
  expect(Math.abs(Math.hypot(re, im) - checkRow('5.slab.R50.l2_0.06283')[0])).toBeLessThan(1e-15);
  for (const lambda2 of [0.001, 0.01, 0.05]) {
    const value = (name: string, values: number[]): { re: number; im: number } => lawNamed(name).value(lambda2, [0.7, 0.4, ...values]);
    const pairs = [
      [value('internal-dispersion', [30, 0]), value('burn-slab', [30])],
      [value('asymmetric-slab', [15, 30]), value('burn-slab', [30])],
      [value('twisted-slab', [30, 0]), value('burn-slab', [30])],
      [value('partial-cover', [30, 12, 1]), value('external-dispersion', [30, 12])],
      [value('resolved-cover', [30, 0, 0.4]), value('thin-screen', [30])],
      [value('tribble-screen', [30, 12, 0]), value('external-dispersion', [30, 12])],
      [value('depth-gradient', [30, 12 * Math.sqrt(8 * Math.LN2)]), value('external-dispersion', [30, 12])],
      [value('external-dispersion', [30, 0]), value('thin-screen', [30])],
      [value('exponential-disc', [30, 1]), value('burn-slab', [30])],
    ];
    for (const [a, b] of pairs) expect(Math.hypot(a.re - b.re, a.im - b.im)).toBeLessThan(1e-9);
    // Tiny arguments take series: they join the closed form.
    const tiny = lawNamed('internal-dispersion').value(lambda2, [1, 0, 0.004 / lambda2 / 100, 0]);
    const near = lawNamed('burn-slab').value(lambda2, [1, 0, 0.004 / lambda2 / 100]);
    expect(Math.hypot(tiny.re - near.re, tiny.im - near.im)).toBeLessThan(1e-12);
  }
});

test('a turbulent slab is the mean over its layers of dispersed screens', () => {
  // Simpson's rule over 2000 layers, error of order 1e-12.
  const [depth, sigma, lambda2] = [40, 15, 0.03];
  const layers = 2000;
  let [re, im] = [0, 0];
  for (let k = 0; k <= layers; k++) {
    const x = k / layers;
    const weight = (k === 0 || k === layers ? 1 : k % 2 === 1 ? 4 : 2) / (3 * layers);
    const fall = Math.exp(-2 * sigma ** 2 * x * lambda2 ** 2);
    re += weight * fall * Math.cos(2 * depth * x * lambda2);
    im += weight * fall * Math.sin(2 * depth * x * lambda2);
  }
  const value = lawNamed('internal-dispersion').value(lambda2, [1, 0, depth, sigma]);
  expect(Math.hypot(value.re - re, value.im - im)).toBeLessThan(1e-10);
});

test('the scale ratio of a partly resolved screen counts in radii where the beam is 1/e: FWHM/1.665 of them', () => {
  // A screen with D(s) = 2 sigma^2 min(1, (s/s0)^2) seen by a Gaussian beam of FWHM 1: pairs of points of
  // such a beam are apart by s with the density s/t^2 e^{-s^2/2t^2}; each loses e^{-2 lambda^4 D(s)}. Simpson's rule.
  const radius = 1 / checkRow('5.tribble.beam')[0];
  const [scale, sigma, lambda2] = [0.5, 20, 0.0441];
  const steps = 20_000;
  const longest = 12 * radius;
  let square = 0;
  for (let k = 0; k <= steps; k++) {
    const s = (longest * k) / steps;
    const weight = ((k === 0 || k === steps ? 1 : k % 2 === 1 ? 4 : 2) * longest) / (3 * steps);
    const structure = 2 * sigma ** 2 * Math.min(1, (s / scale) ** 2);
    // The beam e^{-4 ln 2 x^2} convolved with itself: e^{-2 ln 2 s^2}.
    square += weight * 4 * Math.LN2 * s * Math.exp(-2 * Math.LN2 * s * s - 2 * lambda2 ** 2 * structure);
  }
  const { re, im } = lawNamed('tribble-screen').value(lambda2, [1, 0, 0, sigma, scale / radius]);
  // The bend of D at s0 costs Simpson's rule a square of the step.
  expect(relativeError(Math.hypot(re, im), Math.sqrt(square))).toBeLessThan(1e-6);
});

test('cells of random angle in a region: p falls as 1/sqrt N, its mean by sqrt(pi/4) of that', async () => {
  // Burn 1966. Trials know an rms to 1/(2 sqrt trials) and a mean to 0.52/sqrt trials of itself: 4 sigma.
  for (const [cells, id, trials] of [[10, '5.N10', 4000], [100, '5.N100', 3000], [1000, '5.N1000', 800]] as const) {
    const { uniform } = randomStream(3, 'cells', cells);
    const angle = Float64Array.from({ length: cells * trials }, () => 2 * Math.PI * uniform());
    const cube = (values: Float64Array) => cubeInMemory(values, cells, trials);
    const band = { channels: [{ frequencyHz: 1.4e9, widthHz: 0 }], I: cube(angle.map(() => 1)), Q: cube(angle.map(Math.cos)), U: cube(angle.map(Math.sin)), noise: [0] };
    const sums = await sumRegions([band], { nx: cells, ny: trials, regionOf: Int32Array.from(angle, (_, k) => Math.floor(k / cells)), count: trials });
    let [sum, square] = [0, 0];
    for (let trial = 0; trial < trials; trial++) {
      const { q, u } = regionSpectrum(sums, [trial], { pixelsPerBeam: 1 });
      sum += Math.hypot(q[0], u[0]);
      square += q[0] ** 2 + u[0] ** 2;
    }
    const [rms, mean] = checkRow(id);
    expect(relativeError(Math.sqrt(square / trials), rms)).toBeLessThan(4 / (2 * Math.sqrt(trials)));
    expect(relativeError(sum / trials, mean)).toBeLessThan(4 * (0.52 / Math.sqrt(trials)));
  }
});

test('every law states its parameters; p and chi enter as p e^{2 i chi}; names are unique', () => {
  const all = [...laws, ...sumsOfTwo];
  expect(new Set(all.map(({ name }) => name)).size).toBe(all.length);
  for (const law of all) {
    expect(law.source).toMatch(/\d{4}|derived/);
    expect(new Set(law.parameters.map(({ name }) => name)).size).toBe(law.parameters.length);
    const values = law.parameters.map(({ role }, k) => ({ fraction: 0.3, angle: 0.2, rotation: 20, width: 8, share: 0.5, ratio: 1.5, twist: 1 })[role] + 0.01 * k);
    const turned = values.map((value, k) => (law.parameters[k].role === 'angle' ? value + 0.3 : law.parameters[k].role === 'fraction' ? 2 * value : value));
    const [a, b] = [law.value(0.02, values), law.value(0.02, turned)];
    const [cos, sin] = [2 * Math.cos(0.6), 2 * Math.sin(0.6)];
    expect(Math.hypot(b.re - a.re * cos + a.im * sin, b.im - a.re * sin - a.im * cos)).toBeLessThan(1e-12);
  }
});
