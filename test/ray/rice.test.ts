import { expect, test } from 'vitest';
import { evaluateTable } from '../../src/math/table.ts';
import { randomStream } from '../../src/math/random.ts';
import { riceAligned, riceTables, riceTotal } from '../../src/ray/rice.ts';
import { isotropicTurbulence, tangledMean } from '../reference/closed-forms.ts';
import { relativeError } from '../sky/compare.ts';
import { needPython, pythonJson } from '../support/tools.ts';
import { follow, frequencies, sceneOf } from './scenes.ts';

/** ⟨B^q⟩ and ⟨B^q cos2θ⟩ for B_⊥ and rms σ per component, from the functions under test. */
function moments(q: number, field: number, rms: number, total = riceTotal, aligned = riceAligned): readonly [number, number] {
  const m = field ** 2 + 2 * rms ** 2;
  const u = field ** 2 / m;
  return [m ** (q / 2) * total(q, u), m ** (q / 2) * u * aligned(q, u)];
}

const cases = [1.5, 1.75, 2, 2.25, 2.6].flatMap((q) => [0.01, 0.3, 1, 3, 20].map((field) => [q, field, 1.3] as const));

test('moments are those of a numerical integral over the random field', (context) => {
  needPython(context, 'numpy');
  // Polar Gauss-Legendre × periodic rule over exp(-|B - B0|²/2σ²)/(2πσ²), in numpy.
  const expected = pythonJson(
    `import json, sys, numpy as np
x, w = np.polynomial.legendre.leggauss(400); a = 2*np.pi*np.arange(512)/512
out = []
for q, b0, s in json.load(sys.stdin):
    lo, hi = max(0, b0 - 12*s), b0 + 12*s
    r = lo + (hi - lo)*(x + 1)/2; v = (hi - lo)/2*w
    R, A = np.meshgrid(r, a, indexing='ij')
    p = np.exp(-(R**2 + b0**2 - 2*R*b0*np.cos(A))/(2*s*s))/(2*np.pi*s*s)*R*v[:, None]*(2*np.pi/512)
    out.append([float((p*R**q).sum()), float((p*R**q*np.cos(2*A)).sum())])
print(json.dumps(out))`,
    [],
    JSON.stringify(cases),
  ) as [number, number][];
  cases.forEach(([q, field, rms], k) => {
    const [total, aligned] = moments(q, field, rms);
    // r^{q+1} is not smooth at r = 0: 400 nodes leave 1e-9 of the integral.
    expect(relativeError(total, expected[k][0])).toBeLessThan(1e-8);
    expect(Math.abs(aligned - expected[k][1])).toBeLessThan(1e-8 * expected[k][0]);
  });
});

test('moments are those of a Monte Carlo', () => {
  const stream = randomStream(5, 'rice');
  const count = 60_000;
  const [q, field, rms] = [1.9, 2, 1.5];
  let [sum, square, turned, turnedSquare] = [0, 0, 0, 0];
  for (let k = 0; k < count; k++) {
    const [x, y] = [field + rms * stream.gaussian(), rms * stream.gaussian()];
    const size = Math.hypot(x, y) ** q;
    const cosine = (size * (x * x - y * y)) / (x * x + y * y);
    [sum, square, turned, turnedSquare] = [sum + size, square + size * size, turned + cosine, turnedSquare + cosine * cosine];
  }
  const error = (total: number, squares: number): number => Math.sqrt((squares / count - (total / count) ** 2) / count);
  const [total, aligned] = moments(q, field, rms);
  // Four standard errors of the run itself.
  expect(Math.abs(sum / count - total)).toBeLessThan(4 * error(sum, square));
  expect(Math.abs(turned / count - aligned)).toBeLessThan(4 * error(turned, turnedSquare));
});

test('p = 3: B_⊥² + 2σ² and B_⊥²', () => {
  for (const field of [0.1, 1, 5]) {
    const [total, aligned] = moments(2, field, 0.8);
    // Γ and Kummer's series: 1e-13.
    expect(relativeError(total, field ** 2 + 1.28)).toBeLessThan(1e-12);
    expect(relativeError(aligned, field ** 2)).toBeLessThan(1e-12);
  }
});

test.each([1.2, 2, 2.5, 2.8, 3, 3.4, 5])('tables for p = %d are those functions', (index) => {
  const q = (index + 1) / 2;
  const { total, aligned } = riceTables(index);
  let worst = 0;
  for (let k = 0; k <= 2000; k++) {
    const u = k / 2000;
    worst = Math.max(worst, Math.abs(evaluateTable(total, 0, u) - riceTotal(q, u)), Math.abs(evaluateTable(aligned, 0, u) - riceAligned(q, u)));
  }
  // What rice.ts promises.
  expect(worst).toBeLessThan(1e-12);
});

test.each(isotropicTurbulence)('isotropic turbulence of %d times B_⊥ depolarizes as Burn 1966 says', (ratio, expected) => {
  // p = 3; b is the three-dimensional rms: σ per component is b/√3. Without electrons there is no Faraday dispersion.
  const scene = sceneOf({
    index: 3,
    tolerance: 1e-10,
    field: ['{model: uniform, x: 1 uG, y: 0 uG, z: 0 uG}'],
    electrons: [],
    layers: ['{model: slab, normalisation: 1e-5 cm^-3, halfThickness: 1 kpc}'],
    turbulence: `{rms: ${ratio / Math.sqrt(3)} uG, cell: 1 pc}`,
  });
  const ray = follow(scene, frequencies(1.4e9), [0], [0]);
  expect(relativeError(Math.hypot(ray.Q[0], ray.U[0]) / ray.I[0], 0.75 * expected)).toBeLessThan(1e-11);
});

test.each(tangledMean)('a field that is all random shines as its isotropic mean: p = %d', (index, mean) => {
  // ⟨B_⊥^q⟩ of an isotropic Gaussian field = ⟨|B|^q⟩ ⟨sin^q⟩, with ⟨|B|^q⟩ = (2σ²)^{q/2} Γ((3+q)/2)/Γ(3/2) (Maxwell).
  const q = (index + 1) / 2;
  const gammas: Readonly<Record<number, number>> = { 1.5: 1.1330030963193463, 1.75: 1.2222561575898099, 1.8: 1.2421693445043052, 2: 1.3293403881791372 };
  const maxwell = (2 ** (q / 2) * gammas[q]) / (Math.sqrt(Math.PI) / 2);
  // riceTotal at u = 0 is in units of m^{q/2} = (2σ²)^{q/2}. Γ values: python math.gamma.
  expect(relativeError(2 ** (q / 2) * riceTotal(q, 0), maxwell * mean)).toBeLessThan(1e-11);
});
