import { describe, expect, it } from 'vitest';
import { findCrossings, intervalsAbove } from '../../src/sweep/crossings.ts';
import { makeDesign, rowCount } from '../../src/sweep/design.ts';
import { columnsOf } from '../../src/sweep/evaluate.ts';
import { SweepReading } from '../../src/sweep/reading.ts';
import type { SweepPlan } from '../../src/sweep/types.ts';
import { smallPlan } from './sweeps.ts';

const degree = Math.PI / 180;

/** A reading of rows in which every column is a function of the point. */
function readingOf(plan: SweepPlan, value: (values: Float64Array, column: string, realisation: number) => number): SweepReading {
  const reading = new SweepReading(plan);
  const design = makeDesign(plan);
  const names = columnsOf(plan).map(({ name }) => name);
  const realisations = Math.max(1, plan.realisations);
  for (let row = 0; row < rowCount(plan); row++) {
    const at = design(Math.floor(row / realisations));
    reading.add(row, at, names.map((name) => value(at.values, name, row % realisations)));
  }
  return reading;
}

describe('reading a sweep', () => {
  it('finds where a curve lies above a threshold, blanks and ends included', () => {
    expect(intervalsAbove([0, 1, 2, 3, 4], [0, 4, 8, 4, 0], 6)).toEqual([[1.5, 2.5]]);
    expect(intervalsAbove([0, 1, 2], [9, 9, 9], 6)).toEqual([[undefined, undefined]]);
    expect(intervalsAbove([0, 1, 2, 3], [9, 3, NaN, 9], 6)).toEqual([[undefined, 0.5], [undefined, undefined]]);
    expect(intervalsAbove([0, 1], [1, 2], 6)).toEqual([]);
  });

  it('says it as a sentence', () => {
    // Significance 10 sin(2 i) is 5 at 15 and 75 deg; steps of 2 deg: the straight line is good to 0.02 deg there.
    const plan = smallPlan('vary: {galaxy.inclination: {from: 0 deg, to: 90 deg, steps: 46}}\nmeasure: [asymmetry, detectability]');
    const sentences = findCrossings(plan, readingOf(plan, ([i]) => 10 * Math.sin(2 * i))).map(({ sentence }) => sentence);
    expect(sentences).toContain('the asymmetry at low exceeds 5σ for 15° < inclination < 75°.');
    const never = findCrossings(plan, readingOf(plan, () => 1)).map(({ sentence }) => sentence);
    expect(never[0]).toBe('the asymmetry at low stays below 5σ for inclination from 0° to 90°.');
  });

  it('sums up means and scatter over all else, a curve for each listed value', () => {
    const plan = smallPlan('vary: {galaxy.inclination: {from: 0 deg, to: 80 deg, steps: 5}, field.halo.core: [1 kpc, 3 kpc]}\nrealisations: 4');
    const reading = readingOf(plan, ([i, core], _, realisation) => i / degree + 100 * core + [-1, 1, -1, 1][realisation]);
    const [against] = reading.curves;
    expect(against.families.names).toEqual(['halo core 1 kpc', 'halo core 3 kpc']);
    const relative = 1e-12;
    expect(Math.abs(against.moments[0].mean[5 + 2] / (40 + 300) - 1)).toBeLessThan(relative);
    expect(Math.abs(against.moments[0].scatter(7) - 1)).toBeLessThan(relative);
    expect(reading.heat?.moments[0].count[3]).toBe(4);
  });

  it('gives the shares of a sum: those of a sensitivity design and of a grid are its variances', () => {
    // f = a + 2 b, a and b uniform over ranges of equal width: variances 1 : 4.
    const vary = (more: string): string => `vary: {field.halo.strength: {from: 0 uG, to: 1 uG${more}}, field.halo.core: {from: 1 kpc, to: 2 kpc${more}}}\n`;
    const sum = ([a, b]: Float64Array): number => a + 2 * b;
    for (const [plan, tolerance] of [[smallPlan(`${vary('')}design: sensitivity\nsamples: 512`), 0.02], [smallPlan(vary(', steps: 9')), 1e-12]] as const) {
      const [{ indices }] = readingOf(plan, sum).importance();
      expect(Math.abs(indices[0].first - 0.2)).toBeLessThan(tolerance);
      expect(Math.abs(indices[1].total - 0.8)).toBeLessThan(tolerance);
    }
    expect(readingOf(smallPlan(`${vary('')}design: sobol\nsamples: 64`), sum).importance()).toEqual([]);
  });
});
