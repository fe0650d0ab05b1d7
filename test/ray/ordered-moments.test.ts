import { expect, test } from 'vitest';
import { Graph } from '../../src/formula/graph.ts';
import { compileJavaScript } from '../../src/formula/javascript.ts';
import { lowerGraph } from '../../src/formula/lower.ts';
import { randomStream } from '../../src/math/random.ts';
import { addOrderedMoments, orderedSteps } from '../../src/ray/ordered-moments.ts';
import { faradayConstant } from '../../src/units/constants.ts';
import { relativeError } from '../sky/compare.ts';
import { needPython, pythonJson } from '../support/tools.ts';
import { follow, frequencies, sceneOf } from './scenes.ts';

interface Case {
  readonly p: number;
  readonly mean: readonly [number, number];
  readonly along: readonly [number, number];
  readonly rms: number;
}

/** ⟨B^q⟩ and ⟨B^q cos2θ⟩, ⟨B^q sin2θ⟩ of the magnetic field itself. */
function momentsOf({ p, mean, along, rms }: Case, tolerance: number): number[] {
  const graph = new Graph();
  const steps = orderedSteps(p, tolerance);
  const [x, y] = ['x', 'y'].map((name) => graph.variable(name));
  const constant = (value: number) => graph.constant(value);
  const nodes = addOrderedMoments(graph, { major: x, minor: y, rms: graph.parameter('rms') }, { major: constant(along[0]), minor: constant(along[1]), steps: steps.count });
  const program = lowerGraph(graph, nodes, ['x', 'y']);
  const values: Record<string, number> = { halfPower: (p + 1) / 4, rms, 'ordered/start': steps.start, 'ordered/step': steps.step, 'ordered/weight': steps.weight };
  const out = nodes.map(() => new Float64Array(1));
  compileJavaScript(program).evaluate(1, Float64Array.from(program.parameters, (name) => values[name]), mean.map((value) => Float64Array.of(value)), out, [], []);
  return [out[0][0], -out[1][0], -out[2][0]];
}

const cases: readonly Case[] = [
  { p: 2.8, mean: [3, 1], along: [2, 0], rms: 0 },
  { p: 2.8, mean: [0, 0], along: [1.5, 2], rms: 0 },
  { p: 2, mean: [0.3, 4], along: [3, 1], rms: 1.5 },
  { p: 3.4, mean: [5, -2], along: [0.1, 0.2], rms: 0.5 },
  { p: 1.2, mean: [1, 0], along: [0, 4], rms: 0.01 },
  { p: 5, mean: [2, 2], along: [-1, 1], rms: 1 },
  { p: 2.6, mean: [4, 3], along: [0, 0], rms: 0 },
];

// One-dimensional quadrature over the ordered part, of the isotropic part's own two-dimensional moments, with scipy.
const scipy = `
import sys, json, numpy as np
from scipy.integrate import quad
from scipy.special import hyp1f1, gamma
def inner(bx, by, q, s):
    b2 = bx*bx + by*by
    if s < 1e-9 or b2 > 1400*s*s:
        t = b2**(q/2)
        c = ((bx*bx-by*by)/b2, 2*bx*by/b2) if b2 > 0 else (0, 0)
        corr = 1 + (q*q/2)*s*s/b2 if b2 > 0 else 1
        return t*corr, t*c[0], t*c[1]
    t = b2/(2*s*s)
    f = (2*s*s)**(q/2)
    total = f*gamma(1+q/2)*hyp1f1(-q/2, 1, -t)
    al = f*t*gamma(2+q/2)/2*hyp1f1(1-q/2, 3, -t)
    return total, al*(bx*bx-by*by)/b2 if b2 > 0 else 0, al*2*bx*by/b2 if b2 > 0 else 0
out = []
for c in json.loads(sys.stdin.read()):
    q = (c['p']+1)/2
    (mx, my), (ex, ey), s = c['mean'], c['along'], c['rms']
    e2 = ex*ex+ey*ey
    g0 = -(mx*ex+my*ey)/e2 if e2 > 0 else 0
    row = []
    for k in range(3):
        f = lambda g: inner(mx+g*ex, my+g*ey, q, s)[k]*np.exp(-g*g/2)/np.sqrt(2*np.pi)
        pts = sorted({-12.0, max(-12.0, min(12.0, g0)), 0.0, 12.0})
        row.append(sum(quad(f, a, b, epsabs=1e-12, epsrel=1e-11, limit=400)[0] for a, b in zip(pts, pts[1:])))
    out.append(row)
print(json.dumps(out))
`;

test('moments agree with quadrature by scipy', (context) => {
  needPython(context, 'numpy', 'scipy');
  const smooth = cases.filter(({ rms }) => rms === 0 || rms > 0.1);
  const expected = pythonJson(scipy, [], JSON.stringify(smooth)) as number[][];
  smooth.forEach((one, k) => {
    const size = expected[k][0];
    for (const tolerance of [1e-3, 1e-4, 1e-9]) {
      momentsOf(one, tolerance).forEach((value, j) => expect(Math.abs(value - expected[k][j]) / size).toBeLessThan(Math.max(tolerance, 3e-9)));
    }
  });
});

test.each(cases)('moments agree with Monte Carlo: $p $mean $along $rms', (one) => {
  const { p, mean, along, rms } = one;
  const q = (p + 1) / 2;
  const stream = randomStream(3, 'ordered');
  const count = 200000;
  const [sums, squares] = [[0, 0, 0], [0, 0, 0]];
  for (let k = 0; k < count; k++) {
    const g = stream.gaussian();
    const [x, y] = [mean[0] + g * along[0] + rms * stream.gaussian(), mean[1] + g * along[1] + rms * stream.gaussian()];
    const size = Math.hypot(x, y);
    const values = [size ** q, size ** (q - 2) * (x * x - y * y), size ** (q - 2) * 2 * x * y];
    values.forEach((value, j) => {
      sums[j] += value;
      squares[j] += value * value;
    });
  }
  momentsOf(one, 1e-6).forEach((value, j) => {
    const average = sums[j] / count;
    const error = Math.sqrt(Math.max(0, squares[j] / count - average ** 2) / count);
    expect(Math.abs(value - average)).toBeLessThanOrEqual(4.5 * error + 1e-6 * sums[0] / count);
  });
});

test('closed forms: p = 3, and a field that is all ordered', () => {
  // ⟨B²⟩ = b² + s²|e|² + 2σ², ⟨B² cos2θ⟩ = b1² - b2² + e1² - e2².
  const [total, cosine, sine] = momentsOf({ p: 3, mean: [2, 1], along: [3, -1], rms: 0.7 }, 1e-11);
  expect(relativeError(total, 5 + 10 + 0.98)).toBeLessThan(1e-11);
  expect(relativeError(cosine, 3 + 8)).toBeLessThan(1e-11);
  expect(relativeError(sine, 2 * (2 - 3))).toBeLessThan(1e-11);
  // ⟨|g|^q⟩ = 2^{q/2} Γ((q+1)/2)/√π; for q = 2.5 Γ(1.75) = 0.919062526848883 (scipy).
  const [alone] = momentsOf({ p: 4, mean: [0, 0], along: [0, 2], rms: 0 }, 1e-11);
  expect(relativeError(alone, (2 ** 2.5 * 2 ** 1.25 * 0.919062526848883) / Math.sqrt(Math.PI))).toBeLessThan(1e-11);
});

const slab = '{model: slab, density: 0.03 cm^-3, halfThickness: 0.5 kpc}';
const layer = '{model: slab, normalisation: 1e-6 cm^-3, halfThickness: 0.5 kpc}';
const ordered = (text: string): string[] => [`turbulence: {ordered: {${text}}}`];

test('polarized though it has no mean: p = 3 gives the whole Π0 along the azimuth', () => {
  const field = ['{model: uniform, x: 0 uG, y: 0 uG, z: 0 uG}'];
  const seen = (more: readonly string[], north: number, east: number) => follow(sceneOf({ field, index: 3, electrons: [], layers: [layer], more, tolerance: 1e-9 }), frequencies(1.4e9), [north], [east]);
  // At i = 0 a field along the azimuth north of the centre runs east: the electric vector lies north, χ = 0.
  const ray = seen(ordered('rms: 3 uG, along: azimuth, cell: 0.05 kpc'), 4, 0);
  expect(relativeError(ray.Q[0], 0.75 * ray.I[0])).toBeLessThan(1e-8);
  expect(Math.abs(ray.U[0])).toBeLessThan(1e-8 * ray.I[0]);
  expect(ray.faradayDepth[0]).toBe(0);
  // Along a pitch of -30 deg it is turned by that angle: B at PA 90 + 30 deg, so that χ = 30 deg.
  const turned = seen(ordered('rms: 3 uG, along: pitch, pitch: -30 deg, cell: 0.05 kpc'), 4, 0);
  expect(Math.hypot(turned.Q[0] - 0.375 * turned.I[0], turned.U[0] - 0.75 * turned.I[0] * Math.sin(Math.PI / 3))).toBeLessThan(1e-8 * turned.I[0]);
});

test('adds to Σ by its part along the line of sight, with its own cell', () => {
  // Edge-on at 2 kpc from the axis: gas within r = 2.2 kpc, emission beyond it between 3 and 4 kpc on the far side.
  const gas = '{model: formula, name: gas, parameters: {n: 0.03 cm^-3}, density: "r < 2.2 ? n : 0", edges: {r: [2.2]}}';
  const behind = '{model: formula, name: far, parameters: {n: 1e-6 cm^-3}, density: "y > 0 ? (r > 3 ? (r < 4 ? n : 0) : 0) : 0", edges: {r: [3, 4]}}';
  const parts = { inclination: 90, field: ['{model: uniform, x: 0 uG, y: 0 uG, z: 3 uG}'], electrons: [gas], layers: [behind], index: 3, tolerance: 1e-9 };
  const [rms, cell] = [2, 0.05];
  const bare = follow(sceneOf(parts), frequencies(1.4e9), [2], [0]);
  const damped = follow(sceneOf({ ...parts, more: ordered(`rms: ${rms} uG, along: azimuth, cell: ${cell} kpc`) }), frequencies(1.4e9), [2], [0]);
  // (e·k)² = x²/r²: ∫ dy x²/(x² + y²) = x atan(y/x) on either side.
  const pathPc = 1000 * 2 * 2 * Math.atan(Math.sqrt(2.2 ** 2 - 4) / 2);
  const variance = faradayConstant.value ** 2 * 0.03 ** 2 * rms ** 2 * cell * 1000 * pathPc;
  const square = (299792458 / 1.4e9) ** 2;
  // At p = 3 ⟨B² cos2θ⟩ loses what the ordered field has across the line of sight: rms² y²/(x² + y²).
  const [near, far] = [Math.sqrt(5), Math.sqrt(12)];
  const across = rms ** 2 * (1 - (2 * (Math.atan(far / 2) - Math.atan(near / 2))) / (far - near));
  expect(relativeError(damped.Q[0] / bare.Q[0], ((9 - across) / 9) * Math.exp(-2 * square ** 2 * variance))).toBeLessThan(1e-8);
});

test('JavaScript and WebAssembly agree', () => {
  const disc = '{model: axisymmetric-spiral, name: disc, strength: 8 uG, pitch: -20 deg, radius: 8 kpc, innerRadius: 1 kpc, height: 0.6 kpc, closure: 4 kpc}';
  const scene = sceneOf({ inclination: 50, field: [disc], electrons: [slab], layers: [layer], more: ['turbulence: {unresolved: {rms: 2 uG, cell: 0.05 kpc}, ordered: {rms: 3 uG, along: pitch, pitch: -20 deg, cell: 0.1 kpc, follows: disc}}'] });
  const [a, b] = (['javascript', 'wasm'] as const).map((backEnd) => follow(scene, frequencies(1.4e9, 4.8e9), [0.3, 4, -3], [1, 2, -5], backEnd));
  for (const name of ['I', 'Q', 'U'] as const) a[name].forEach((value, k) => expect(Math.abs(b[name][k] - value)).toBeLessThan(1e-12 * a.I[k]));
});
