import { describe, expect, it } from 'vitest';
import { searchModes } from '../../../src/field/dynamo/modes.ts';
import { linearMatrix, type DynamoOperator } from '../../../src/field/dynamo/operator.ts';
import { preparePoloidal, quenchedRate } from '../../../src/field/dynamo/quench.ts';
import { saturate } from '../../../src/field/dynamo/saturate.ts';
import { rateScale } from '../../../src/field/dynamo/scales.ts';
import { DynamoDecays, solveDynamo } from '../../../src/field/dynamo/solve.ts';
import { nodeField } from '../../../src/field/dynamo/unknowns.ts';
import { needPython, pythonJson } from '../../support/tools.ts';
import { smallProblem, smoothDisc } from './disc.ts';
import { sine, slab } from './slab.ts';

/** The slab's field once it is saturated, from its fastest mode. */
async function saturated(operator: DynamoOperator, size: number): Promise<Awaited<ReturnType<typeof saturate>> & { readonly frequency: number }> {
  const rate = rateScale(operator);
  const [mode] = searchModes(linearMatrix(operator, operator.alpha), 1, rate);
  const scale = size / mode.shape[0].reduce((most, value) => Math.max(most, Math.abs(value)), 0);
  return { ...(await saturate(operator, mode.shape[0].map((value) => scale * value), mode.growthRate, rate)), frequency: mode.frequency };
}

describe('saturation', () => {
  it('gives the field that scipy’s integration of the thin-disc equations gives', async (context) => {
    needPython(context, 'scipy', 'numpy');
    const operator = slab(-30, sine, { rAlpha: 1, cells: 60 });
    const { x, period } = await saturated(operator, 0.3);
    expect(period).toBeUndefined();
    const { azimuthal } = nodeField(operator.unknowns, x);
    // The equations in B_r and B_phi themselves (physics.md section 6), on another grid, to their steady end.
    const python = `
import json, numpy as np
from scipy.integrate import solve_ivp
n = 120
z = np.linspace(0, 1, n + 1); h = z[1]
def d(f, parity):
    g = np.empty_like(f); g[1:-1] = (f[2:] - f[:-2]) / (2*h)
    g[0] = 0 if parity > 0 else f[1] / h
    g[-1] = (3*f[-1] - 4*f[-2] + f[-3]) / (2*h)
    return g
def dd(f):
    g = np.zeros_like(f); g[1:-1] = (f[2:] - 2*f[1:-1] + f[:-2]) / h**2
    g[0] = 2 * (f[1] - f[0]) / h**2
    return g
def rate(t, y):
    br, bp = y[:n+1].copy(), y[n+1:].copy(); br[-1] = bp[-1] = 0
    alpha = np.sin(np.pi*z) / (1 + br**2 + bp**2)
    a = -d(alpha*bp, -1) + dd(br)
    b = -30*br + d(alpha*br, -1) + dd(bp)
    a[-1] = b[-1] = 0
    return np.concatenate([a, b])
y = np.concatenate([-0.1*np.cos(np.pi*z/2), 0.5*np.cos(np.pi*z/2)])
s = solve_ivp(rate, (0, 60), y, method='BDF', rtol=1e-8, atol=1e-10)
print(json.dumps(s.y[n+1:, -1].tolist()))`;
    const expected = pythonJson(python) as number[];
    const sign = Math.sign(azimuthal[0] * expected[0]);
    azimuthal.forEach((value, j) => {
      // Both are of second order, on 60 and 120 cells.
      expect(Math.abs(sign * value - expected[2 * j])).toBeLessThan(2e-3 * Math.abs(expected[0]));
    });
  });

  it('obeys the equations: nothing changes any more', async () => {
    const operator = slab(-30, sine, { rAlpha: 1, cells: 40 });
    const { x } = await saturated(operator, 0.3);
    const { rate } = quenchedRate(operator, preparePoloidal(operator), x);
    const largest = (values: Float64Array): number => values.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
    // In units of the decay over the disc, rounding times the largest entries (2 · 40^2) aside.
    expect(largest(rate)).toBeLessThan(1e-6 * largest(x));
  });

  it('finds the period of a field that oscillates, near that of its marginal mode', async () => {
    // A little beyond D = 171.58, where the even mode of frequency 13.566 is marginal (checks.json 8.other).
    const { period } = await saturated(slab(185, sine, { rAlpha: 0.1, cells: 40 }), 0.3);
    expect(Math.abs((2 * Math.PI) / (period ?? NaN) / 13.566 - 1)).toBeLessThan(0.05);
  });

  it('does not depend on the size of the seed', async () => {
    const fieldOf = async (seed: number): Promise<number> => {
      const operator = slab(-20, sine, { rAlpha: 1, cells: 30 });
      return Math.abs((await saturated(operator, seed)).x.reduce((most, value) => (Math.abs(value) > Math.abs(most) ? value : most), 0));
    };
    const [a, b] = [await fieldOf(0.01), await fieldOf(5)];
    expect(Math.abs(a / b - 1)).toBeLessThan(1e-6);
  });
});

describe('a disc with its halo, saturated', () => {
  it('opens its poloidal field upward where a wind blows', async () => {
    /** Mean |B_z| over mean |B_r| between half the height and the top, inside the radius of 6 kpc. */
    const opening = async (wind: number): Promise<number> => {
      const { field } = await solveDynamo(smallProblem(smoothDisc(wind)));
      const { radialPoints: nr, radialStepKpc: dr, verticalStepKpc: dz, potential } = field;
      const middle = (field.verticalPoints - 1) / 2;
      let [vertical, radial] = [0, 0];
      for (let j = middle + middle / 2; j < 2 * middle; j++) {
        for (let i = 1; i * dr < 6; i++) {
          const at = i + j * nr;
          radial += Math.abs((potential[at + nr] - potential[at - nr]) / (2 * dz));
          vertical += Math.abs(((i + 1) * potential[at + 1] - (i - 1) * potential[at - 1]) / (2 * i * dr));
        }
      }
      return vertical / radial;
    };
    const [calm, blown] = [await opening(0), await opening(40)];
    expect(blown).toBeGreaterThan(2 * calm);
  });

  it('says what remains uncertain between its two grids, and that it grows', async () => {
    const { modes, fieldError, parity, field, saturationTime } = await solveDynamo(smallProblem(smoothDisc(), { modes: 2 }));
    expect(parity).toBe('even');
    expect(modes).toHaveLength(2);
    expect(modes[0].growthRate.fine).toBeGreaterThan(modes[1].growthRate.fine);
    expect(modes[0].growthRate.fine).toBeGreaterThan(0);
    expect(modes[0].relativeError).toBeLessThan(0.02);
    expect(fieldError.azimuthal).toBeGreaterThan(0);
    expect(fieldError.azimuthal).toBeLessThan(0.05);
    expect(saturationTime).toBeGreaterThan(0);
    // Even parity: B_phi the same above and below, A_phi opposite; both vanish on the axis.
    const { radialPoints: nr, verticalPoints: nz } = field;
    for (const j of [0, 5, 20]) {
      const [below, above] = [j * nr + 7, (nz - 1 - j) * nr + 7];
      expect(field.azimuthal[below]).toBe(field.azimuthal[above]);
      expect(field.potential[below]).toBe(-field.potential[above]);
      expect(field.azimuthal[j * nr]).toBe(0);
    }
  });

  it('refuses to saturate what decays', async () => {
    const weak = { ...smoothDisc(), alpha: () => 0 };
    await expect(solveDynamo(smallProblem(weak))).rejects.toThrow(DynamoDecays);
  });
});
