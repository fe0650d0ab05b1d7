import { describe, expect, it } from 'vitest';
import { priorResiduals, scaledBounds, scaledFromValue, slopeFromScaled, spreadStarts, valueFromScaled } from '../../src/infer/prior.ts';
import type { FreeParameter, Prior } from '../../src/infer/prior.ts';

const parameter = (prior: Prior, allowed: [number, number] = [-Infinity, Infinity]): FreeParameter => ({
  path: `field.a.${prior.kind}`, unit: 'uG', shownUnit: 'uG', prior, allowed, start: 1,
});
const uniform = parameter({ kind: 'uniform', low: -2, high: 6 });
const logUniform = parameter({ kind: 'logUniform', low: 0.1, high: 10 });
const normal = parameter({ kind: 'normal', mean: 40, sigma: 2 }, [0, 43]);

describe('priors', () => {
  it('have a scale of their own', () => {
    expect(scaledFromValue(uniform, 0)).toBe(0.25);
    expect(scaledFromValue(logUniform, 1)).toBe(0.5);
    expect(scaledFromValue(normal, 37)).toBe(-1.5);
    for (const [p, value] of [[uniform, 1.7], [logUniform, 0.34], [normal, 41.3]] as const) {
      const scaled = scaledFromValue(p, value);
      // Rounding.
      expect(Math.abs(valueFromScaled(p, scaled) / value - 1)).toBeLessThan(1e-14);
      const step = 1e-5;
      const slope = (valueFromScaled(p, scaled + step) - valueFromScaled(p, scaled - step)) / (2 * step);
      // Central difference: step^2 of truncation, 1e-11 of rounding.
      expect(Math.abs(slopeFromScaled(p, scaled) / slope - 1)).toBeLessThan(1e-8);
    }
  });

  it('are bounded by their range and by what the scene allows', () => {
    expect(scaledBounds(uniform)).toEqual([0, 1]);
    expect(scaledBounds(parameter({ kind: 'uniform', low: -2, high: 6 }, [0, 4]))).toEqual([0.25, 0.75]);
    expect(scaledBounds(parameter({ kind: 'logUniform', low: 0.1, high: 10 }, [-5, 1]))).toEqual([0, 0.5]);
    expect(scaledBounds(normal)).toEqual([-20, 1.5]);
  });

  it('add residuals where they are normal', () => {
    expect(priorResiduals([uniform, normal, logUniform], Float64Array.of(0.2, -1.5, 0.4))).toEqual(Float64Array.of(-1.5));
  });

  it('spread starts with one in each stratum', () => {
    const starts = spreadStarts([uniform, logUniform, normal], 10, 3);
    expect(starts).toEqual(spreadStarts([uniform, logUniform, normal], 10, 3));
    expect(starts).not.toEqual(spreadStarts([uniform, logUniform, normal], 10, 4));
    for (const j of [0, 1]) {
      expect(starts.map((start) => Math.floor(start[j] * 10)).sort()).toEqual([0, 1, 2, 3, 4, 5, 6, 7, 8, 9]);
    }
    const spread = starts.map((start) => start[2]);
    expect(Math.min(...spread)).toBeGreaterThanOrEqual(-2);
    expect(Math.max(...spread)).toBeLessThanOrEqual(1.5);
    expect(Math.max(...spread) - Math.min(...spread)).toBeGreaterThan(2.8);
    // Not the same order in every parameter.
    expect(starts.some((start) => Math.floor(start[0] * 10) !== Math.floor(start[1] * 10))).toBe(true);
  });
});
