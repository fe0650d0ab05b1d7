import { describe, expect, it } from 'vitest';
import { makeLikelihood, type ResidualPlace } from '../../src/infer/likelihood.ts';
import type { DataSet } from '../../src/infer/types.ts';
import { structureSentence, whiteness } from '../../src/infer/whiteness.ts';
import { randomStream } from '../../src/math/random.ts';
import { needPython, pythonJson } from '../support/tools.ts';
import { correlatedNoise } from './correlated-noise.ts';
import { testAxes } from './grids.ts';

const side = 20;
const places = (planes: number): ResidualPlace[] =>
  Array.from({ length: planes * side * side }, (_, k) => {
    const [plane, slow, fast] = [Math.floor(k / (side * side)), Math.floor(k / side) % side, k % side];
    return { plane, pixelX: fast + 1, pixelY: slow + 1, slow, fast };
  });
const white = (count: number, index: number): Float64Array => {
  const random = randomStream(5, 'white', index);
  return Float64Array.from({ length: count }, () => random.gaussian());
};

describe('whiteness', () => {
  it('is the neighbour correlation as numpy computes it, plane by plane', (context) => {
    needPython(context, 'numpy');
    const z = white(2 * side * side, 0);
    const code = `
import json, sys, numpy as np
z = np.array(json.loads(sys.stdin.read())).reshape(2, ${side}, ${side})
p = np.concatenate([(z[:, 1:] * z[:, :-1]).ravel(), (z[:, :, 1:] * z[:, :, :-1]).ravel()])
print(json.dumps([p.mean() / (z**2).mean(), len(p)]))`;
    const [correlation, pairs] = pythonJson(code, [], JSON.stringify([...z])) as number[];
    const ours = whiteness(z, places(2));
    expect(Math.abs(ours.correlation - correlation)).toBeLessThan(1e-12);
    expect(ours.pairs).toBe(pairs);
    const first = whiteness(z, places(2), new Set([0]));
    expect(first.pairs).toBe(pairs / 2);
    expect(Math.abs(first.correlation - whiteness(z.subarray(0, side * side), places(1)).correlation)).toBeLessThan(1e-12);
  });

  it('scatters about 0 by its error for white residuals, and is 0.5 for means of two neighbours', () => {
    const pulls = Array.from({ length: 200 }, (_, k) => whiteness(white(side * side, k), places(1))).map(({ correlation, error }) => correlation / error);
    const mean = pulls.reduce((a, b) => a + b, 0) / 200;
    const scatter = Math.sqrt(pulls.reduce((a, b) => a + b * b, 0) / 200);
    // The mean of 200 unit Gaussians to 4 sigma, their scatter to 4/sqrt(400).
    expect(Math.abs(mean)).toBeLessThan(4 / Math.sqrt(200));
    expect(Math.abs(scatter - 1)).toBeLessThan(0.2);
    // Along the fast axis (z_k + z_k+1)/sqrt 2 has a neighbour correlation of 1/2, along the slow one of 0: a quarter in all.
    const z = white(side * side + 1, 999);
    const smooth = Float64Array.from({ length: side * side }, (_, k) => (z[k] + z[k + 1]) / Math.SQRT2);
    const { correlation, error } = whiteness(smooth, places(1));
    expect(Math.abs(correlation - 0.25) / error).toBeLessThan(4);
    expect(structureSentence('a', { correlation, error, pairs: 1 })).toMatch(/not white.*structure/);
    expect(structureSentence('a', { correlation: error, error, pairs: 1 })).toBe('');
  });

  it('finds noise of the stated beam white after whitening, and a smooth error of the model in it', () => {
    const axes = testAxes(40, 40, 20);
    const beam = { majorArcsec: 80, minorArcsec: 60, angle: 0.4 };
    const [Q, U] = correlatedNoise(axes, beam, 3, 2);
    const data: DataSet = {
      axes, unit: 'Jy/beam', assumptions: [], bands: [{ name: 'a', channels: [{ frequencyHz: 1.4e9, widthHz: 0 }], beam }],
      planes: [Q, U].map((values, k) => ({ quantity: k === 0 ? 'Q' : 'U', band: 0, channel: 0, values, noise: 1, correlation: beam })),
    };
    const likelihood = makeLikelihood(data);
    const nothing = Q.map(() => 0);
    const noise = whiteness(likelihood.residuals([nothing, nothing]), likelihood.places);
    expect(Math.abs(noise.correlation) / noise.error).toBeLessThan(4);
    const wave = Q.map((_, k) => 2 * Math.sin((k % 40) / 6));
    const wrong = whiteness(likelihood.residuals([wave, nothing]), likelihood.places);
    expect(wrong.correlation / wrong.error).toBeGreaterThan(4);
  });
});
