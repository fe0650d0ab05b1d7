import { expect, test } from 'vitest';
import { averageNodes, channelNodes, phaseAcross } from '../../src/sky/bandwidth.ts';
import { turnByForeground } from '../../src/sky/foreground.ts';
import { channelLambda2M2, lambda2M2 } from '../../src/sky/wavelength.ts';
import { spreadFunction } from '../../src/sky/depth-spectrum.ts';
import { checkRow } from '../reference/check-rows.ts';
import { bandwidthRows } from '../reference/sky.ts';
import { relativeError } from './compare.ts';

/** |P| of unit polarization behind a depth, averaged over a channel. */
function averagedP(channel: { frequencyHz: number; widthHz: number }, depth: number, tolerance: number): number {
  const { frequenciesHz, weights } = channelNodes(channel, depth, tolerance);
  const Q = new Float64Array(weights.length).fill(1);
  const U = new Float64Array(weights.length);
  turnByForeground(Q, U, frequenciesHz, depth);
  return Math.hypot(averageNodes(Q, weights)[0], averageNodes(U, weights)[0]);
}

test('the mean over a channel in frequency is that of Burn 1966, to each tolerance', () => {
  for (const row of bandwidthRows) {
    for (const tolerance of [1e-3, 1e-6, 1e-10]) {
      expect(Math.abs(averagedP(row, row.depth, tolerance) - checkRow(row.id)[1])).toBeLessThan(tolerance);
    }
  }
});

test('evenly in lambda^2 a channel loses sinc(RM x its width), hardly else than in frequency', () => {
  for (const { id, depth, frequencyHz, widthHz } of bandwidthRows) {
    const [long, short] = [lambda2M2(frequencyHz - widthHz / 2), lambda2M2(frequencyHz + widthHz / 2)];
    const count = 4000;
    const lambda2 = Float64Array.from({ length: count }, (_, k) => short + ((long - short) * (k + 0.5)) / count);
    const weights = lambda2.map(() => 1 / count);
    const P = Math.hypot(...spreadFunction({ lambda2M2: lambda2, weights, referenceLambda2: (long + short) / 2 }, depth));
    // A sum of 4000 against the integral: (phase/4000)^2/24 = 1e-8; the rows say 1e-6.
    expect(relativeError(P, checkRow(id)[0])).toBeLessThan(1e-7);
    expect(relativeError(averagedP({ frequencyHz, widthHz }, depth, 1e-9), P)).toBeLessThan(3e-6);
  }
});

test('a wide channel that turns many times is followed', () => {
  const channel = { frequencyHz: 1e9, widthHz: 4e8 };
  // 11 turns: against a mean over 4e5 equal steps, midpoint error (phase/steps)^2/24.
  const depth = 450;
  expect(phaseAcross(channel, depth) / (2 * Math.PI)).toBeGreaterThan(10);
  const steps = 400_000;
  let [re, im] = [0, 0];
  for (let k = 0; k < steps; k++) {
    const angle = 2 * depth * lambda2M2(8e8 + (4e8 * (k + 0.5)) / steps);
    re += Math.cos(angle) / steps;
    im += Math.sin(angle) / steps;
  }
  expect(Math.abs(averagedP(channel, depth, 1e-7) - Math.hypot(re, im))).toBeLessThan(1.1e-7);
});

test('a spectrum of nu^-3 is averaged to tolerance, and weights sum to 1', () => {
  const channel = { frequencyHz: 1.4e9, widthHz: 2e8 };
  const { frequenciesHz, weights } = channelNodes(channel, 0, 1e-8);
  const mean = averageNodes(frequenciesHz.map((nu) => (nu / 1.4e9) ** -3), weights)[0];
  // The mean of x^-3 over [a, b] is (a^-2 - b^-2)/(2 (b - a)).
  const [a, b] = [1.3 / 1.4, 1.5 / 1.4];
  expect(Math.abs(mean - (a ** -2 - b ** -2) / (2 * (b - a)))).toBeLessThan(1e-8);
  expect(Math.abs(weights.reduce((x, y) => x + y) - 1)).toBeLessThan(1e-14);
});

test('nodes are few where they may be: one for a monochromatic channel', () => {
  expect(channelNodes({ frequencyHz: 1.4e9, widthHz: 0 }, 1e6, 1e-9).weights).toEqual(Float64Array.of(1));
  expect(channelNodes({ frequencyHz: 4.8e9, widthHz: 1e7 }, 10, 1e-4).weights.length).toBe(1);
  expect(channelNodes({ frequencyHz: 1.4e9, widthHz: 1.25e7 }, 300, 1e-4).weights.length).toBeLessThan(6);
});

test('channels that cannot be averaged are refused', () => {
  expect(() => channelNodes({ frequencyHz: 1e9, widthHz: 5e8 }, 1e5, 1e-4)).toThrow(/times across.*narrower/);
  expect(() => channelNodes({ frequencyHz: 1e9, widthHz: 2e9 }, 1, 1e-4)).toThrow(/twice the frequency/);
});

test('a foreground turns Q and U by 2 lambda^2 RM, pixel by pixel too', () => {
  // lambda^2 at 1.4 GHz is 0.0458541 m^2 (c = 299792458 m/s); RM = pi/(4 lambda^2) turns Q into U.
  const lambda2 = (299792458 / 1.4e9) ** 2;
  const [Q, U] = [Float64Array.of(1, 1, 2, 2), Float64Array.of(0, 0, 0, 0)];
  turnByForeground(Q, U, [1.4e9, 1.4e9 * Math.SQRT2], Float64Array.of(Math.PI / (4 * lambda2), 0));
  const expected = [0, 1, Math.SQRT2, 2];
  expected.forEach((value, k) => expect(Math.abs(Q[k] - value)).toBeLessThan(1e-15 * 4));
  [1, 0, Math.SQRT2, 0].forEach((value, k) => expect(Math.abs(U[k] - value)).toBeLessThan(1e-15 * 4));
});

test('the mean lambda^2 of a channel is the mean of c^2/nu^2', () => {
  const { frequenciesHz, weights } = channelNodes({ frequencyHz: 1e9, widthHz: 6e8 }, 0, 1e-12);
  const mean = averageNodes(frequenciesHz.map(lambda2M2), weights)[0];
  expect(relativeError(channelLambda2M2({ frequencyHz: 1e9, widthHz: 6e8 }), mean)).toBeLessThan(1e-11);
});
