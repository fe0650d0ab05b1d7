import { expect, test } from 'vitest';
import { steadyPower, steadySineCosine } from '../../src/math/steady.ts';

test('sine and cosine are those of the engine, to rounding', () => {
  for (let k = -4000; k <= 4000; k++) {
    const angle = k * 0.0137;
    const [sine, cosine] = steadySineCosine(angle);
    // Rounding of the reduced angle: 1 part in 2^52 of it, and the sum's own.
    expect(Math.abs(sine - Math.sin(angle))).toBeLessThan(4e-16);
    expect(Math.abs(cosine - Math.cos(angle))).toBeLessThan(4e-16);
  }
});

test('powers are those of the engine, to rounding of the exponent', () => {
  for (const [base, exponent] of [[1e9, -0.9], [3.7, 2.5], [1e-12, 0.8]] as const) {
    expect(Math.abs(steadyPower(base, exponent) / Math.pow(base, exponent) - 1)).toBeLessThan(2e-16 * (1 + Math.abs(exponent * Math.log(base))));
  }
});
