import { expect, test } from 'vitest';
import { laws, sumsOfTwo } from '../../src/measure/laws/index.ts';
import type { Law } from '../../src/measure/laws/types.ts';
import { lawRows, slabZero, twoSlabRows } from '../reference/laws.ts';
import { relativeError } from '../sky/compare.ts';

function lawNamed(name: string): Law {
  const law = laws.find((one) => one.name === name);
  if (!law) throw new Error(`no law ${name}`);
  return law;
}

test('every law gives the published values', () => {
  for (const { law, values, lambda2, P, angle } of lawRows) {
    const { re, im } = lawNamed(law).value(lambda2, [1, 0, ...values]);
    // The rows carry nine digits.
    expect(relativeError(Math.hypot(re, im), P), `${law} ${values.join(' ')}`).toBeLessThan(1e-8);
    if (angle !== undefined) expect(Math.abs(Math.atan2(im, re) - angle), law).toBeLessThan(2e-9);
  }
  // Nothing is left out.
  expect(new Set(lawRows.map(({ law }) => law)).size).toBe(laws.length - 2);
});

test('two slabs give the published Q and U; an asymmetric slab is one of them without near emission', () => {
  for (const [lambda2, Q, U] of twoSlabRows) {
    const { re, im } = lawNamed('two-slabs').value(lambda2, [0.6, 0.3, 40, 0.4, 1, -25]);
    expect(Math.abs(re - Q)).toBeLessThan(2e-9);
    expect(Math.abs(im - U)).toBeLessThan(2e-9);
    const dark = lawNamed('two-slabs').value(lambda2, [0.6, 0.3, 40, 0, 1, -25]);
    const asymmetric = lawNamed('asymmetric-slab').value(lambda2, [0.6, 0.3, -25 + 20, 40]);
    expect(Math.abs(dark.re - asymmetric.re) + Math.abs(dark.im - asymmetric.im)).toBeLessThan(1e-12);
  }
});

test('a slab vanishes where R lambda^2 is pi, and laws meet where they must', () => {
  const { re, im } = lawNamed('burn-slab').value(slabZero.lambda2, [1, 0, slabZero.depth]);
  expect(Math.hypot(re, im)).toBeLessThan(1e-15);
  for (const lambda2 of [0.001, 0.01, 0.05]) {
    const value = (name: string, values: number[]): { re: number; im: number } => lawNamed(name).value(lambda2, [0.7, 0.4, ...values]);
    const pairs = [
      [value('internal-dispersion', [30, 0]), value('burn-slab', [30])],
      [value('asymmetric-slab', [15, 30]), value('burn-slab', [30])],
      [value('twisted-slab', [30, 0]), value('burn-slab', [30])],
      [value('partial-cover', [30, 12, 1]), value('external-dispersion', [30, 12])],
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
