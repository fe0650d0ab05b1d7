import { describe, expect, it } from 'vitest';
import { directionOrder, planckBrightness } from '../../src/ray/dust.ts';
import { followGas } from '../../src/ray/gas-rays.ts';
import { sceneOf, type SceneParts } from './scenes.ts';

const layers = ['{model: slab, normalisation: 1e-5 cm^-3, halfThickness: 1 kpc}'];
const dustKeys = 'polarization: 0.2, temperature: 20 K, opacity: 1e-26 cm^2, at: 353 GHz';
const gas = [`dust: {${dustKeys}}`, 'zeeman: {}'];
const slab = '{model: slab, density: 0.5 cm^-3, halfThickness: 1 kpc}';
const central = { northKpc: Float64Array.of(0), eastKpc: Float64Array.of(0) };

/** Degrees of Q, U of one column, and the angle of the electric vector, deg. */
function lookAt(parts: Omit<SceneParts, 'layers'>, bundle = central): { column: number; degree: number; angle: number; along: number } {
  const { column, Q, U, weight, weightedField } = followGas(sceneOf({ layers, electrons: [slab], more: gas, ...parts }), bundle);
  return { column: column[0], degree: Math.hypot(Q[0], U[0]) / column[0], angle: (Math.atan2(U[0], Q[0]) * 90) / Math.PI, along: weightedField[0] / weight[0] };
}

describe('what rays see of the gas', () => {
  // Face-on at position angle 0 the major axis x points north, y east (physics.md section 2): closed forms.
  it.each([
    [0, 90],
    [30, -60],
    [120, 30],
  ])('is fully polarized across a field in the sky at %d deg, north through east', (angle, expected) => {
    const [x, y] = [Math.cos((angle * Math.PI) / 180), Math.sin((angle * Math.PI) / 180)];
    const seen = lookAt({ field: [`{model: uniform, x: ${x} uG, y: ${y} uG, z: 0 uG}`] });
    expect(Math.abs(seen.column - 1)).toBeLessThan(5e-11);
    expect(Math.abs(seen.degree - 1)).toBeLessThan(5e-11);
    expect(Math.abs(((seen.angle - expected + 270) % 180) - 90)).toBeLessThan(1e-8);
    expect(Math.abs(seen.along)).toBeLessThan(5e-11);
  });

  it('turns with the position angle', () => {
    const seen = lookAt({ field: ['{model: uniform, x: 2 uG, y: 0 uG, z: 0 uG}'], positionAngle: 25, inclination: 50 });
    expect(Math.abs(seen.angle - (25 - 90))).toBeLessThan(5e-9);
  });

  it.each([20, 60, 85])('of an axial field at inclination %d deg has cos² of its angle to the sky, and its part along the ray', (inclination) => {
    const radians = (inclination * Math.PI) / 180;
    const seen = lookAt({ field: ['{model: uniform, x: 0 uG, y: 0 uG, z: 3 uG}'], inclination, radius: 40 });
    expect(Math.abs(seen.degree - (Math.sin(radians) ** 2))).toBeLessThan(5e-9);
    expect(Math.abs(seen.along - (3 * Math.cos(radians)))).toBeLessThan(5e-9);
    // A slab of |z| < 1 kpc is 2/cos i long.
    expect(Math.abs(seen.column * Math.cos(radians) - 1)).toBeLessThan(5e-9);
  });

  it('does not see a reversal in dust, and cancels it in B along the ray', () => {
    const field = ['{model: formula, field: {x: "z > 0.25 ? 2 : -2", y: "0", z: "z > 0.25 ? 4 : -4"}, edges: {z: ["0.25"]}}'];
    const seen = lookAt({ field });
    expect(Math.abs(seen.degree - (4 / 20))).toBeLessThan(5e-9);
    // 0.75 kpc of 4 uG against 1.25 kpc of -4 uG.
    expect(Math.abs(seen.along - ((4 * (0.75 - 1.25)) / 2))).toBeLessThan(5e-9);
  });

  it('finds a reversal that no edge declares', () => {
    const field = ['{model: formula, field: {x: "2", y: "0", z: "z > 0.3137 ? 4 : -4"}}'];
    expect(Math.abs(lookAt({ field }).along - (-4 * 0.3137))).toBeLessThan(5e-4);
  });

  it('weighs with the density that is named', () => {
    const electrons = [slab, '{model: gaussian-disc, name: cold, density: 3 cm^-3, radius: 5 kpc, height: 0.2 kpc}'];
    const more = ['dust: {follows: cold, ' + dustKeys + '}', 'zeeman: {follows: cold}'];
    // ∫ e^{-z²/h²} dz or e^{-z²/2h²}: the ratio to the model's own column, taken at 0 by the two scenes, is that of densities.
    const one = followGas(sceneOf({ layers, field: ['{model: uniform, x: 0 uG, y: 0 uG, z: 3 uG}'], electrons, more }), central);
    const other = followGas(sceneOf({ layers, field: ['{model: uniform, x: 0 uG, y: 0 uG, z: 3 uG}'], electrons: [electrons[1]], more: gas }), central);
    expect(Math.abs(one.column[0] - other.column[0])).toBeLessThan(5e-5);
    expect(Math.abs(one.weight[0] - other.weight[0])).toBeLessThan(5e-5);
  });

  it('loses degree to unresolved turbulence as directions spread', () => {
    const seen = lookAt({ field: ['{model: uniform, x: 3 uG, y: 0 uG, z: 0 uG}'], turbulence: '{rms: 2 uG, cell: 0.05 kpc}' });
    expect(Math.abs(seen.degree - directionOrder(1.5))).toBeLessThan(5e-11);
  });
});

describe('directions about a mean field', () => {
  // Ratio of ∫ r² e^{-r²/2} ∫ P2(μ) e^{brμ} dμ dr to the same without P2, by sums over r and μ.
  it.each([0.05, 0.7, 1.99, 2.01, 5, 24])('keep the order of the integral over the Gaussian, b = %d', (b) => {
    let [top, bottom] = [0, 0];
    for (let i = 0; i < 300; i++) {
      const r = Math.max(0, b - 12) + ((i + 0.5) * (b + 12 - Math.max(0, b - 12))) / 300;
      for (let j = 0; j < 1500; j++) {
        // Finer where the weight sits: μ = 1 - 2 t³.
        const t = (j + 0.5) / 1500;
        const mu = 1 - 2 * t ** 3;
        const weight = r * r * Math.exp(-(r * r + b * b) / 2 + b * r * mu) * t * t;
        top += weight * (1.5 * mu * mu - 0.5);
        bottom += weight;
      }
    }
    expect(Math.abs(directionOrder(b) - top / bottom)).toBeLessThan(2e-6);
  });

  it('vanish and align at the ends', () => {
    expect(directionOrder(0)).toBe(0);
    expect(Math.abs(directionOrder(25.000001) - directionOrder(24.999999))).toBeLessThan(5e-7);
    expect(Math.abs(directionOrder(1e6) - 1)).toBeLessThan(5e-11);
  });
});

it("Planck's law has its Rayleigh–Jeans limit and its value at hν = kT", () => {
  // 2 k T ν²/c² = 3.0723e4 Jy/sr per K at 1 GHz (constants of CODATA); x/(e^x - 1) = 0.58198 at x = 1.
  expect(Math.abs(planckBrightness(1000, 1e9) / (1000 * 30723.5) - 1)).toBeLessThan(5e-5);
  const frequency = 20.836619e9 * 20;
  expect(Math.abs(planckBrightness(20, frequency) / (20 * 30723.5 * (frequency / 1e9) ** 2) - 0.58198)).toBeLessThan(5e-5);
});
